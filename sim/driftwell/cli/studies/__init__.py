"""The commands on studies: sweeps, limits and convergence, and what they show on the way."""
