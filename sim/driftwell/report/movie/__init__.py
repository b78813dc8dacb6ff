"""A run as a movie: its charges seen along the axes, frame by frame."""
