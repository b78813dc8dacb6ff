"""What a file of charges must hold, whatever its format.

x, y, z are required. Velocities are vx, vy, vz (ordinary), ux, uy, uz (proper, gamma v) or momenta
px, py, pz of one real particle: all three of one kind, or none. There may be the weight of each
charge, and mass and charge of a real particle, which must be those of the species. Where a file
holds several clouds (the text `cloud`) or times (t), a :class:`Choice` says which rows are meant;
id and species are known and change nothing. Any other column is a fault, and so is a number that is
not finite: nothing in a file is passed over in silence.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.errors import ScenarioError
from driftwell.forms import Charge, Length, Mass, Momentum, Time, Velocity
from driftwell.forms.body import Body
from driftwell.forms.choice import Choice
from driftwell.forms.columns import TOLD, ColumnError, ColumnRules, Columns
from driftwell.particles.proper_velocity import Floats, proper_velocity
from driftwell.particles.state import LARGEST_COUNT

PLACES = ("x", "y", "z")
ORDINARY = ("vx", "vy", "vz")
PROPER = ("ux", "uy", "uz")
MOMENTA = ("px", "py", "pz")
SAME_MASS, SAME_CHARGE = 1e-3, 1e-6
"""Relative differences from the species within which a file's particles are of it: tables of masses
differ, and some count the electrons that an ion has lost."""


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

    def velocity(self, body: Body) -> Floats | None:
        """(3, n), proper velocity, m/s; None where the file has none."""
        if PROPER[0] in self.columns.values:
            return np.array([self.columns.values[name] for name in PROPER])
        if MOMENTA[0] in self.columns.values:
            mass = self.columns.values.get("mass", np.array(body.mass))
            return np.array([self.columns.values[name] / mass for name in MOMENTA])
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

    def weight(self) -> Floats | None:
        """(n,), above 0; None where the file has none."""
        weight = self.columns.values.get("weight")
        if weight is not None and not (weight > 0.0).all():
            raise ColumnError(
                *(
                    f"{self.columns.where(int(row))}: weight must be greater than 0"
                    for row in np.flatnonzero(~(weight > 0.0))[:TOLD]
                )
            )
        return weight

    def check(self, body: Body) -> None:
        """Raise ColumnError where the file's particles are of another species than `body`."""
        for name, own, unit, near in (
            ("mass", body.mass, "kg", SAME_MASS),
            ("charge", body.charge, "C", SAME_CHARGE),
        ):
            values = self.columns.values.get(name)
            if values is not None and (np.abs(values - own) > near * abs(own)).any():
                worst = values[np.argmax(np.abs(values - own))]
                raise ColumnError(
                    f": holds particles with a {name} of {worst:.6g} {unit}, and {body.name} has "
                    f"{own:.6g} {unit}; name their species in the scenario, or others by `of`"
                )


def charges_chosen(columns: Columns, choice: Choice, births: bool = False) -> ChargeColumns:
    """The rows that are meant; raises ColumnError where that is not clear.

    births : each row has its own time t, and all times are meant
    """
    if not columns.chosen:
        if "cloud" in columns.texts:
            clouds = columns.texts["cloud"]
            wanted = choice.group(list(dict.fromkeys(clouds)))
            columns = _rows(columns, np.array([name == wanted for name in clouds], np.bool_))
        elif choice.of is not None:
            raise ColumnError(": has no column `cloud`; leave out `of`")
    if not births:
        columns = _at_one_time(columns, choice)
    elif not columns.chosen and (choice.at is not None or choice.iteration is not None):
        raise ColumnError(": says when each charge is born; leave out `at` and `iteration`")
    return ChargeColumns(columns)


def _at_one_time(columns: Columns, choice: Choice) -> Columns:
    time = columns.values.get("t")
    if time is None or not time.size:
        if not columns.chosen and (choice.at is not None or choice.iteration is not None):
            raise ColumnError(": has no column t; leave out `at` and `iteration`")
        return columns
    times = np.unique(time)
    if columns.chosen:
        if len(times) > 1:
            raise ColumnError(
                ": has particles with a time each; name it in a [[source]] with an emitter of the "
                "kind file"
            )
        return columns
    return _rows(columns, time == times[choice.moment(times.tolist())])


def _rows(columns: Columns, kept: np.ndarray) -> Columns:
    """Some of the rows."""
    rows = np.flatnonzero(kept)
    if len(rows) == len(kept):
        return columns
    return Columns(
        {name: values[rows] for name, values in columns.values.items()},
        lambda row: columns.where(int(rows[row])),
        {name: [texts[row] for row in rows.tolist()] for name, texts in columns.texts.items()},
    )


def one_weight(weight: Floats | None, files: Sequence[str]) -> float:
    """The weight that all charges of a file have; 1 where it has none. Raises ScenarioError."""
    if weight is None or not weight.size:
        return 1.0
    low, high = float(weight.min()), float(weight.max())
    if low != high:
        raise ScenarioError(
            f"{', '.join(files)}: holds weights from {low:.6g} to {high:.6g}, and all charges of a "
            "cloud or source stand for as many; give `weight` or `total_charge`, or part the file"
        )
    return low


def _name_faults(names: Sequence[str]) -> list[str]:
    """Columns that are missing, or too many."""
    lines = [f'column "{name}" is missing' for name in PLACES if name not in names]
    kinds = [group for group in (ORDINARY, PROPER, MOMENTA) if any(each in names for each in group)]
    for group in kinds:
        lines += [
            f'column "{name}" is missing beside '
            + " and ".join(other for other in group if other in names)
            for name in group
            if name not in names
        ]
    if len(kinds) > 1:
        first, second = (", ".join(group) for group in kinds[:2])
        lines.append(f"needs either {first} or {second}, not both")
    return lines


CHARGE_RULES = ColumnRules(
    "charge",
    LARGEST_COUNT,
    "x [mm], y [mm], z [mm]",
    {
        **dict.fromkeys(PLACES, Length),
        **dict.fromkeys((*ORDINARY, *PROPER), Velocity),
        **dict.fromkeys(MOMENTA, Momentum),
        "weight": None,
        "mass": Mass,
        "charge": Charge,
        "id": None,
        "t": Time,
    },
    _name_faults,
    ("cloud", "species"),
)
