"""What a file of charges must hold, whatever its format.

x, y, z are required. Velocities are either vx, vy, vz (ordinary) or ux, uy, uz (proper, gamma v),
all three or none. Any other column is a fault, and so is a number that is not finite: nothing in a
file is passed over in silence.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.forms import Length, Velocity, read_quantity
from driftwell.particles.proper_velocity import Floats, proper_velocity
from driftwell.particles.state import LARGEST_COUNT

PLACES = ("x", "y", "z")
ORDINARY = ("vx", "vy", "vz")
PROPER = ("ux", "uy", "uz")
KNOWN = (*PLACES, *ORDINARY, *PROPER)
TOLD = 5
"""Faults of one file that are told before the rest is left."""


class ChargeFileError(Exception):
    """What is wrong with a file of charges: lines that begin where its name ends."""

    def __init__(self, *lines: str) -> None:
        super().__init__(*lines)
        self.lines = lines


@dataclass(frozen=True, slots=True)
class ChargeColumns:
    """A file as read.

    values : SI values by name of the column, (n,) float64 each
    where : the place of a row in the file, as a message says it after the file's name
    """

    values: dict[str, Floats]
    where: Callable[[int], str]

    def __post_init__(self) -> None:
        count = self.values["x"].size
        if count == 0:
            raise ChargeFileError(": holds no charges; needs at least one row")
        if count > LARGEST_COUNT:
            raise ChargeFileError(f": holds {count} charges; at most {LARGEST_COUNT} can be used")

    def position(self) -> Floats:
        """(3, n), m."""
        return np.array([self.values[name] for name in PLACES])

    def velocity(self) -> Floats | None:
        """(3, n), proper velocity, m/s; None where the file has none."""
        if PROPER[0] in self.values:
            return np.array([self.values[name] for name in PROPER])
        if ORDINARY[0] not in self.values:
            return None
        velocity = np.array([self.values[name] for name in ORDINARY])
        too_fast = np.flatnonzero(np.hypot(np.hypot(*velocity[:2]), velocity[2]) >= SPEED_OF_LIGHT)
        if too_fast.size:
            raise ChargeFileError(
                *(
                    f"{self.where(int(row))}: vx, vy, vz must be slower than light "
                    f"({SPEED_OF_LIGHT:.0f} m/s)"
                    for row in too_fast[:TOLD]
                )
            )
        return proper_velocity(velocity)


def check_names(names: Sequence[str], where: str) -> None:
    """Raise a fault where `names` are not the columns of a file of charges."""
    lines = [
        f'{where}: unknown column "{name}"; the columns are {", ".join(KNOWN)}'
        for name in names
        if name not in KNOWN
    ]
    lines += [
        f'{where}: column "{name}" is there {names.count(name)} times'
        for name in KNOWN
        if names.count(name) > 1
    ]
    lines += [f'{where}: column "{name}" is missing' for name in PLACES if name not in names]
    for group in (ORDINARY, PROPER):
        if any(name in names for name in group):
            lines += [
                f'{where}: column "{name}" is missing beside '
                + " and ".join(other for other in group if other in names)
                for name in group
                if name not in names
            ]
    if any(name in names for name in ORDINARY) and any(name in names for name in PROPER):
        lines.append(f"{where}: needs either vx, vy, vz or ux, uy, uz, not both")
    if lines:
        raise ChargeFileError(*lines)


def si_factor(name: str, unit: str, where: str) -> float:
    """What a number in the column `name` with `unit` is multiplied by."""
    try:
        return read_quantity(Length if name in PLACES else Velocity, f"1 {unit}")
    except ValueError as fault:
        raise ChargeFileError(f'{where}: unit "{unit}" of column "{name}": {fault}') from fault
