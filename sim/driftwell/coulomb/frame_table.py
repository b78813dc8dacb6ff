"""The table of the bunches' frames: what the sum in them reads, keeps, and hands over.

One row for each bunch, and a last one for all together. SI units; U is a bunch's proper velocity.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

PROPER = 0
"""3 entries, m/s: U, the mass-weighted mean of the charges' proper velocities."""
LORENTZ = 3
"""Gamma = sqrt(1 + U^2/c^2)."""
KNOWN = 4
"""1 once a charge of the bunch has been in a sum."""
BEFORE = 5
"""3 entries, m/s: U at the sum before."""
SLOPE = 8
"""3 entries, J s/m: dW/dU of the bunch's energy W at fixed places."""
ENERGY = 11
"""J: W, of the bunch's charges with each other."""
GIVEN = 12
"""3 entries, N: what all other bunches push this one with."""
CENTRE = 15
"""3 entries, m: mean place of its charges, from which sums are taken that need an origin."""
MASS = 18
"""kg, of its charges."""
RATES = 19
"""3 entries, N: momentum of the bunch that the fields from outside give in a second."""
COLUMNS = 24

PUSH = 0
"""Of the last row, 3 entries, N: sum of what bunches do to each other."""
TWIST = 3
"""3 entries, N m: torque about the origin of all charges' forces on each other."""
WORK = 6
"""J, the change of all W by changes of U, since the sum before."""

ROWS = 11
"""Of the room to work in, each (n,): three of stretched places, one of charges, four of field and
potential, three of what other bunches do."""
PLACE, CHARGE, FOUND, OTHERS = 0, 3, 4, 8


def frame_table(bunches: int) -> Floats:
    """A table for so many bunches, none of them known yet: as if at rest."""
    table = np.zeros((bunches + 1, COLUMNS))
    table[:bunches, LORENTZ] = 1.0
    return table
