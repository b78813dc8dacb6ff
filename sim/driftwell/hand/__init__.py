"""What can be worked out by hand of a scenario, beside what a run of it says."""
