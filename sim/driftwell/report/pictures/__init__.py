"""The pictures of a run, one a file."""
