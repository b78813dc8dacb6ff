"""The scenario file: read, checked, explained, described to editors."""
