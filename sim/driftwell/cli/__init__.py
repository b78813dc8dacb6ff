"""The command line: the only place that reads arguments, prints, and chooses exit codes."""
