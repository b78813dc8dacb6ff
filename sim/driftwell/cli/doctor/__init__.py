"""What ``driftwell doctor`` looks at, one file for each group of checks."""
