"""Scenarios whose answers are known, and the closed forms that say so."""
