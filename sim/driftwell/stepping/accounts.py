"""The accounts the stepping keeps while it runs, added up with their rounding carried along.

Every force evaluation gives seven rates: the power the drives put in, and the force and torque of
the fields on all charges. They count for as long as the kicks made with them last.
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.sums import add_compensated

WORK_DRIVE = 0
"""J, work of time-dependent potentials: sum of Q d(phi)/dt."""
IMPULSE_FIELDS = 1
"""3 entries, N s, by electric fields."""
TORQUE_FIELDS = 4
"""3 entries, N m s, about the origin, by electric fields."""
RATES = 7
"""The first seven accounts grow with every force evaluation."""
WORK_INDUCED = 7
"""J, work of electric fields induced by changing magnets."""
IMPULSE_MAGNETS = 8
TORQUE_MAGNETS = 11
ENERGY_WALLS = 14
"""J, kinetic and potential energy the absorbed charges had when they were taken out."""
MOMENTUM_WALLS = 15
ANGULAR_WALLS = 18
CHARGE_WALLS = 21
COUNT_WALLS = 22
IMPULSE_IMAGES = 23
"""3 entries, N s, by charges that conductors answer with."""
TORQUE_IMAGES = 26
ENERGY_SOURCES = 29
"""J, kinetic and potential energy of charges born, as they join the sums."""
MOMENTUM_SOURCES = 30
ANGULAR_SOURCES = 33
CHARGE_SOURCES = 36
COUNT_SOURCES = 37
ENERGY_PROCESSES = 38
"""J, given to the charges by all processes together: gas, drag, lasers, ..."""
MOMENTUM_PROCESSES = 39
ANGULAR_PROCESSES = 42
WORK_FRAMES = 45
"""J, given by what the charges' own field does besides following its energy: see ledger.md."""
IMPULSE_FRAMES = 46
"""3 entries, N s, of the same: momentum that stands in the electromagnetic field."""
TORQUE_FRAMES = 49
ENERGY_CELL = 52
"""J, in the fields, given by re-entry at the other end of a periodic cell."""
ANGULAR_CELL = 53
"""3 entries, N m s, of the same."""
ACCOUNTS = 56

Six = tuple[float, float, float, float, float, float]
"""The three components of a vector, then those of its moment about the origin."""


@inner_kernel
def settle(rate: np.ndarray, pending: np.ndarray, total: np.ndarray, carry: np.ndarray) -> None:
    """Enter the rates of the last force evaluation for the time their kicks lasted.

    rate : (7,) float64; pending : (1,) float64, s, set to zero
    total, carry : (accounts,) float64, added to
    """
    last = pending[0]
    for k in range(RATES):
        # two-sum (D. E. Knuth, The Art of Computer Programming, vol. 2, 4.2.2), free of branches
        amount = last * rate[k]
        before = total[k]
        after = before + amount
        part = after - before
        carry[k] += (before - (after - part)) + (amount - part)
        total[k] = after
    pending[0] = 0.0


@inner_kernel
def enter_rates(power: float, sums: Six, out_rate: np.ndarray) -> None:
    """Keep the rates of a force evaluation: the drives' power, the fields' force and torque."""
    out_rate[0] = power
    out_rate[1], out_rate[2], out_rate[3] = sums[0], sums[1], sums[2]
    out_rate[4], out_rate[5], out_rate[6] = sums[3], sums[4], sums[5]


@outer_kernel
def enter_vector(
    k: int, x: float, y: float, z: float, total: np.ndarray, carry: np.ndarray
) -> None:
    """Add a vector to the three accounts from `k` on."""
    add_compensated(total, carry, k, x)
    add_compensated(total, carry, k + 1, y)
    add_compensated(total, carry, k + 2, z)


@outer_kernel
def enter_wall_moment(
    x: float,
    y: float,
    z: float,
    px: float,
    py: float,
    pz: float,
    total: np.ndarray,
    carry: np.ndarray,
) -> None:
    """Add x cross p, of momentum that a wall takes at a place, to its account."""
    enter_vector(ANGULAR_WALLS, y * pz - z * py, z * px - x * pz, x * py - y * px, total, carry)
