"""Convergence: how far the answers of one run change with everything numerical in it."""
