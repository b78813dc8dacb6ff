"""The cases, one file for each area."""
