"""Every kind of figure, one a file."""
