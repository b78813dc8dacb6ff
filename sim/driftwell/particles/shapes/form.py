"""What every shape declares, and what it gives: places, and for some kinds velocities."""

from __future__ import annotations

from pathlib import Path
from typing import NamedTuple

import numpy as np

from driftwell.forms import Form, Point, key
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws
from driftwell.particles.proper_velocity import Floats


class Placement(NamedTuple):
    """Where charges are, and how they move where the shape says so.

    position : (3, n) float64, m
    velocity : (3, n) float64, proper velocity, m/s; None leaves it to the cloud's motion
    weight : (n,) real particles each stands for; None leaves it to the cloud
    """

    position: Floats
    velocity: Floats | None = None
    weight: Floats | None = None


class ShapeForm(Form):
    """Base of all shapes."""

    centre: Point = key("place the shape's own coordinates count from", default=(0.0, 0.0, 0.0))

    def fixes_count(self) -> bool:
        """Whether the shape itself says how many charges there are."""
        return False

    def sets_velocity(self, folder: Path) -> bool:
        """Whether the shape itself says how the charges move.

        Raises ScenarioError where a file has to be read for it and cannot be.
        """
        return False

    def files_named(self) -> tuple[str, ...]:
        """Files the shape reads, relative to the scenario's folder."""
        return ()

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        """The charges; `count` is 0 for a shape that fixes it.

        Raises ScenarioError where a file cannot be read.
        """
        raise TypeError(f"{type(self).__name__} must say where charges are")

    def moved(self, position: Floats) -> Floats:
        """Places in the shape's own coordinates, (3, n), seen from the scenario's origin."""
        return np.asarray(position + np.array(self.centre)[:, None])

    def words(self) -> str:
        """The shape in words."""
        raise TypeError(f"{type(self).__name__} must describe itself")
