"""The account of energy, momentum, angular momentum, charge and count."""
