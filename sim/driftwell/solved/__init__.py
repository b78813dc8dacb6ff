"""Solved fields of electrodes: kept by digest, mapped on grids, handed to the run."""
