"""The report of a run as one HTML page: one section, one file."""
