"""Shapes: where the charges of a cloud are at its start, one kind in one file."""
