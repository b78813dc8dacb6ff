"""Laplace's equation around conductors, by charges on their surfaces (boundary elements)."""
