"""Reports of sweeps, convergence and limit studies as one HTML page each."""
