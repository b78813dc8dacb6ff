"""Published values against runs of the command line: cases, how they are run, the page."""
