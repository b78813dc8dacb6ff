"""What a run takes of the solved field: packed fields, its edges, how fast charges move in it.

The voltages are sorted by their course in time (waves.py); each course is one field for compiled
code, with the weighted sum of the unit maps. Where the map ends the field is not known: its edges
absorb, as walls with names of their own.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.bodies import own_bodies
from driftwell.electrodes.form import Electrodes
from driftwell.fields.form import FieldRegion, PackedField
from driftwell.fields.map_files.swing import most_curved
from driftwell.fields.maps.potential_map import map_places
from driftwell.fields.rates import linear_rates
from driftwell.forms.body import Body
from driftwell.forms.waveform_table import waveform_table
from driftwell.forms.waveforms import AnyWaveform, packed_waveform, waveform_breaks
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.kernels.waveform import waveform
from driftwell.scenario.model import Scenario
from driftwell.solved.edges import Edges
from driftwell.solved.solved_field import SolvedField, is_kept, nearest, solved_field
from driftwell.solved.store import Told
from driftwell.solved.waves import Course, courses

Floats = NDArray[np.float64]

_PLACES = 4000
"""Places of the region at which the field's curvature is looked at."""
_FAR = 0.15
"""Part of the largest distance to the electrodes that such a place has from them at the least."""
_DECAY = 2.405
"""Along the bore of a tube the field falls as exp(-2.405 z/R): the first zero of J0."""


@dataclass(frozen=True)
class ActingField:
    """The electrodes' field as a run steps in it.

    solved : unit solutions and map
    centre : place of the electrodes' own origin, m
    courses : the voltages by their course in time, weights of all electrodes and the enclosure
    bodies : of all electrodes, in their own coordinates
    """

    solved: SolvedField
    centre: tuple[float, float, float]
    courses: tuple[Course, ...]
    bodies: BodyTable

    def nearest(self, points: Floats) -> tuple[Floats, NDArray[np.int64]]:
        """Signed distances (n,), m, of points in the map's coordinates to the nearest electrode,
        and whose it is (n,)."""
        return nearest(self.bodies, self.solved.geometry, points)

    def packed(self) -> list[PackedField]:
        """One field for each course."""
        mapped = self.solved.map
        return [
            mapped.packed(
                mapped.combined(course.weight), self.centre, packed_waveform(course.waveform)
            )
            for course in self.courses
        ]

    def voltages(self, t: float) -> Floats:
        """Voltages (e,) of all unit solutions at the time `t`, s."""
        table = waveform_table([packed_waveform(course.waveform) for course in self.courses])
        total = np.zeros(len(self.solved.map.coefficients))
        for k, course in enumerate(self.courses):
            value, _ = waveform(table.kind[k], table.parameter[k], table.data, t, t)
            total += value * course.weight
        return total

    def breaks(self, duration: float) -> list[list[float]]:
        """For each course, times in (0, duration) where it or its slope jumps, s."""
        return [waveform_breaks(course.waveform, duration) for course in self.courses]

    @property
    def edges(self) -> Edges:
        """Where the map ends."""
        region = FieldRegion(self.solved.geometry, self.solved.map.region())
        remedy = "Give [electrodes] a larger `region`, or move the cloud"
        return Edges("the electrodes' field", region, self.centre, remedy)

    def rates(self, body: Body, speed: float, position: Floats | None = None) -> dict[str, float]:
        """Angular frequencies, rad/s, a charge moves or is driven with in the field.

        speed : m/s, the largest a charge of the kind begins with
        position : (3, n) m, where charges of the kind are held from the start, if any: the field
            may be curved more there than elsewhere
        """
        found = {"flight past the electrodes": _DECAY * speed / self._widest}
        slow = 0.0
        for course, usual in zip(self.courses, self._bends, strict=True):
            bend = max(usual, self._curved_at(position, course.weight))
            rates = linear_rates({"motion": abs(body.charge_to_mass) * bend}, course.waveform)
            slow += rates["motion"] ** 2
            drive = rates.get("drive", 0.0)
            found["drive"] = max(found.get("drive", 0.0), drive)
        return {**found, "oscillation": math.sqrt(slow)}

    def _curved_at(self, position: Floats | None, weight: Floats) -> float:
        """Curvature, V/m^2, of a course's potential at all but a few of the places, at the most."""
        mapped = self.solved.map
        if position is None:
            return 0.0
        places = map_places(mapped.geometry, self.centre, position)
        return most_curved(mapped.grid, mapped.combined(weight), places)

    @cached_property
    def _places(self) -> tuple[Floats, Floats]:
        """Places of the open region, and their distances from the electrodes."""
        region = np.array(self.solved.map.region())
        drawn = np.random.default_rng(1).random((_PLACES, len(region)))
        places = region[:, 0] + drawn * (region[:, 1] - region[:, 0])
        if self.solved.geometry == "axisymmetric":
            places[:, 0] = np.abs(places[:, 0])
        return places, self.nearest(places)[0]

    @property
    def _widest(self) -> float:
        """Largest distance of a place from the electrodes, m."""
        return float(self._places[1].max())

    @cached_property
    def _bends(self) -> list[float]:
        """Largest curvature of each course's potential, V/m^2, not right at the electrodes."""
        places, distance = self._places
        chosen = places[distance > _FAR * self._widest]
        return [
            float(np.abs(np.linalg.eigvalsh(self.solved.map.curvature(chosen, c.weight))).max())
            for c in self.courses
        ]


def acting_field(scenario: Scenario, folder: Path, told: Told | None = None) -> ActingField | None:
    """The solved field with the voltages of a scenario's electrodes; None where it has none.

    folder : what files named in the scenario count from

    Raises ScenarioError or DriftwellError where it cannot be solved; the text says why.
    """
    if not scenario.electrode:
        return None
    electrodes = scenario.electrodes or Electrodes()
    solved = solved_field(electrodes, scenario.electrode, folder, told or _unheard)
    voltages: list[AnyWaveform] = [each.voltage for each in scenario.electrode]
    voltages += [0.0] * (len(solved.map.coefficients) - len(voltages))
    return ActingField(
        solved,
        electrodes.centre,
        tuple(courses(voltages)),
        body_table(own_bodies(electrodes, scenario.electrode, folder)),
    )


def field_is_kept(scenario: Scenario, folder: Path) -> bool:
    """Whether the electrodes' field need not be solved: it is kept, or there are none."""
    if not scenario.electrode:
        return True
    return is_kept(scenario.electrodes or Electrodes(), scenario.electrode, folder)


def _unheard(sentence: str) -> None:
    """Nobody listens."""
