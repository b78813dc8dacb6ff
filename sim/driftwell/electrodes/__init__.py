"""Electrodes as a scenario declares them, and the shapes they may have."""
