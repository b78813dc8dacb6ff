"""The charges' own repulsion: sums of Coulomb's law over all pairs."""
