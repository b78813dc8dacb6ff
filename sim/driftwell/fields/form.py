"""What every kind of field declares, and the numbers it packs for compiled code."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import Enum
from pathlib import Path
from typing import Self

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import Form, Name, Point, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault
from driftwell.forms.waveform_table import PackedWaveform
from driftwell.forms.waveforms import AnyWaveform


class Role(Enum):
    """How the stepping uses a field."""

    ELECTRIC = "electric"
    """phi(x, t) = w(t) g(x): pushes by -grad phi, its drive does the work w'(t) g."""
    UNIFORM_MAGNETIC = "uniform magnetic"
    """The same B everywhere: the drift follows its helix exactly."""
    MAGNETIC = "magnetic"
    """B(x, t) = w(t) curl a(x): turns velocities halfway through the drift."""


@dataclass(frozen=True, slots=True)
class PackedField:
    """One field as numbers: what the table of its role holds in one row.

    data : the kind's own numbers beyond its parameters, few or (k,) float64
    """

    role: Role
    kind: int
    parameters: tuple[float, ...]
    waveform: PackedWaveform
    data: tuple[float, ...] | NDArray[np.float64] = ()


@dataclass(frozen=True, slots=True)
class FieldRegion:
    """The part of space in which a field is known, in the field's own coordinates.

    geometry : "axisymmetric" (r, z), "planar" (x, y) or "spatial" (x, y, z)
    ends : from and to along each axis, m; r from minus the largest to the largest
    """

    geometry: str
    ends: tuple[tuple[float, float], ...]


class FieldForm(Form):
    """Base of all fields. `centre` is the origin the field's own coordinates count from."""

    name: Name = key("what the field is called in messages and results")
    centre: Point = key("origin of the field's own coordinates", default=(0.0, 0.0, 0.0))

    def species_named(self) -> tuple[str, ...]:
        """Names of species the options refer to (each must exist in the scenario)."""
        return ()

    def files_named(self) -> tuple[str, ...]:
        """Files the field reads, relative to the scenario's folder."""
        return ()

    def found_in(self, folder: Path) -> Self:
        """The field, knowing the scenario's folder; paths of files it names count from there."""
        return self

    def faults(self) -> list[Fault]:
        """What is wrong with the files it names: paths of keys count from the field's table."""
        return []

    def region(self) -> FieldRegion | None:
        """Where the field is known; None where its formula holds everywhere.

        Beyond the region a field goes on smoothly for a little and means nothing.
        """
        return None

    def waveform(self) -> AnyWaveform:
        """The value in time that scales the field; its breaks end steps exactly."""
        return 1.0

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        """The field as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def all_packed(self, bodies: Mapping[str, Body]) -> tuple[PackedField, ...]:
        """All rows of the tables that the field takes: one, unless it is a sum of several."""
        return (self.packed(bodies),)

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """Angular frequencies (rad/s) a particle of `body` would move or be driven with.

        The names are those the automatic step choice shows: "drive", "secular", "axial",
        "radial", "oscillation", "cyclotron", "magnetron", "crossing".
        """
        return {}

    def rates_at(self, body: Body, position: NDArray[np.float64]) -> dict[str, float]:
        """The same where a body is at places (3, n), m, of a field that differs from place to
        place; empty where :meth:`rates` says all."""
        return {}

    def strongest(self) -> float:
        """Largest flux density, T, that the step and the cautions are to reckon with."""
        return 0.0

    def where(self) -> str:
        """The centre in words, to end a sentence with; nothing where it is the origin."""
        if self.centre == (0.0, 0.0, 0.0):
            return ""
        return f", centred at ({', '.join(spelled(x, 'm') for x in self.centre)})"

    def words(self) -> str:
        """One sentence for `driftwell check`: what the field does, with its numbers."""
        raise TypeError(f"{type(self).__name__} must describe itself")
