"""What every sum over pairs looks like to the time loop."""

from __future__ import annotations

from driftwell.kernels.pointers import CompiledFunction

PairSum = CompiledFunction
"""A sum as the time loop takes it: (position, charge, softening2, constant, work, out_field).

It is handed over as a pointer, so that the loop is compiled once, whichever sum it is given.
"""
SIGNATURE = "void(float64[:,::1], float64[::1], float64, float64, float64[:,::1], float64[:,::1])"
