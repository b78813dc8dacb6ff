"""Figures of a run for papers: one drawn at a time, at the size it is printed in."""
