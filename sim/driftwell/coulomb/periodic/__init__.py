"""The Coulomb sum in a cell that repeats without end along one axis."""
