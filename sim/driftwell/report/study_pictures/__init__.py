"""The pictures of studies: sweeps, convergence, limits."""
