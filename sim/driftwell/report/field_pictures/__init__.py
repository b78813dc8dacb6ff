"""The pictures of a solved field."""
