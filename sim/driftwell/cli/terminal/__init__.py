"""What all commands share: printing, times of day, signals, threads."""
