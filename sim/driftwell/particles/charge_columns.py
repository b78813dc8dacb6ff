"""What a file of charges must hold, whatever its format.

x, y, z are required. Velocities are either vx, vy, vz (ordinary) or ux, uy, uz (proper, gamma v),
all three or none. Any other column is a fault, and so is a number that is not finite: nothing in a
file is passed over in silence.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.forms import Length, Velocity
from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns
from driftwell.particles.proper_velocity import Floats, proper_velocity
from driftwell.particles.state import LARGEST_COUNT

PLACES = ("x", "y", "z")
ORDINARY = ("vx", "vy", "vz")
PROPER = ("ux", "uy", "uz")


@dataclass(frozen=True, slots=True)
class ChargeColumns:
    """A file as read.

    columns : at least one row of them
    """

    columns: Columns

    def __post_init__(self) -> None:
        if self.columns.values["x"].size == 0:
            raise ColumnError(": holds no charges; needs at least one row")

    def position(self) -> Floats:
        """(3, n), m."""
        return np.array([self.columns.values[name] for name in PLACES])

    def velocity(self) -> Floats | None:
        """(3, n), proper velocity, m/s; None where the file has none."""
        if PROPER[0] in self.columns.values:
            return np.array([self.columns.values[name] for name in PROPER])
        if ORDINARY[0] not in self.columns.values:
            return None
        velocity = np.array([self.columns.values[name] for name in ORDINARY])
        too_fast = np.flatnonzero(np.hypot(np.hypot(*velocity[:2]), velocity[2]) >= SPEED_OF_LIGHT)
        if too_fast.size:
            raise ColumnError(
                *(
                    f"{self.columns.where(int(row))}: vx, vy, vz must be slower than light "
                    f"({SPEED_OF_LIGHT:.0f} m/s)"
                    for row in too_fast[:TOLD]
                )
            )
        return proper_velocity(velocity)


def _name_faults(names: Sequence[str]) -> list[str]:
    """Columns that are missing, or too many."""
    lines = [f'column "{name}" is missing' for name in PLACES if name not in names]
    for group in (ORDINARY, PROPER):
        if any(name in names for name in group):
            lines += [
                f'column "{name}" is missing beside '
                + " and ".join(other for other in group if other in names)
                for name in group
                if name not in names
            ]
    if any(name in names for name in ORDINARY) and any(name in names for name in PROPER):
        lines.append("needs either vx, vy, vz or ux, uy, uz, not both")
    return lines


CHARGE_RULES = ColumnRules(
    "charge",
    LARGEST_COUNT,
    "x [mm], y [mm], z [mm]",
    {**dict.fromkeys(PLACES, Length), **dict.fromkeys((*ORDINARY, *PROPER), Velocity)},
    _name_faults,
)
