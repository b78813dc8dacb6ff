"""Fields kept as splines on a grid: kernels, fits, refinement, and maps from files."""
