"""What every kind of emitter declares, and what it gives: places, normals, for files all of it."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path
from typing import NamedTuple

import numpy as np

from driftwell.forms import Form
from driftwell.forms.body import Body
from driftwell.geometry.solid import Solid
from driftwell.particles.draws import Draws
from driftwell.particles.proper_velocity import Floats

LIFT = 1e-9
"""Charges are born this part of a surface's size above it: which side they are on is then clear."""


class Leaving(NamedTuple):
    """Charges as they leave.

    position : (3, n) float64, m
    normal : (3, n) float64, outward unit vectors of the surface
    velocity : (3, n) float64, proper velocity, m/s; None leaves it to the source
    time : (n,) float64, s, rising; None leaves it to the source
    weight : (n,) real particles each stands for; None leaves it to the source
    """

    position: Floats
    normal: Floats
    velocity: Floats | None = None
    time: Floats | None = None
    weight: Floats | None = None


class EmitterForm(Form):
    """Base of all emitters."""

    def fixes_births(self) -> bool:
        """Whether the emitter itself says when charges are born and how they move."""
        return False

    def electrode_named(self) -> str | None:
        """The electrode it is on, if any."""
        return None

    def files_named(self) -> tuple[str, ...]:
        """Files it reads, relative to the scenario's folder."""
        return ()

    def has_area(self) -> bool:
        """Whether it is a surface."""
        return False

    def area(self, solids: Sequence[Solid]) -> float:
        """The area that emits, m^2; solids : the bodies of the electrode it is on."""
        return 0.0

    def extent(self, solids: Sequence[Solid]) -> float:
        """A length, m, of the order of its size."""
        return float(np.sqrt(self.area(solids) / np.pi))

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        """The charges; `count` is 0 for an emitter that fixes the births.

        Raises ScenarioError where a file cannot be read, or an electrode has no such part.
        """
        raise TypeError(f"{type(self).__name__} must say where charges are born")

    def words(self) -> str:
        """The emitter in words."""
        raise TypeError(f"{type(self).__name__} must describe itself")


def repeated(vector: Sequence[float], count: int) -> Floats:
    """One vector for each of the charges, (3, count)."""
    return np.repeat(np.asarray(vector, dtype=np.float64)[:, None], count, axis=1)
