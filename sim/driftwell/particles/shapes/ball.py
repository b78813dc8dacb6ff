"""Balls and ellipsoids, filled evenly: as many charges in each equal part of the volume.

A uniform ellipsoid of semi-axis a has the variance a^2/5 along it.
"""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import numpy as np

from driftwell.forms import Length, Positive, key
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.in_words import each_in_words
from driftwell.particles.proper_velocity import Floats
from driftwell.particles.shapes.form import Placement, ShapeForm

_PLACING = "random: independent of each other; even: a low-discrepancy sequence"


def in_unit_ball(points: Floats) -> Floats:
    """Points of the unit cube, (3, n), taken to the unit ball; equal volumes stay equal."""
    radius = np.cbrt(points[0])
    cosine = 2.0 * points[1] - 1.0
    across = radius * np.sqrt(1.0 - cosine**2)
    angle = 2.0 * np.pi * points[2]
    return np.array([across * np.cos(angle), across * np.sin(angle), radius * cosine])


class Ball(ShapeForm):
    """Uniform density within a sphere."""

    kind: Literal["ball"]
    radius: Positive[Length] = key("radius of the ball", example="1 mm")
    placing: Placing = key(_PLACING, default="random")

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        points = draws.unit_points("place", count, 3, self.placing)
        return Placement(self.moved(self.radius * in_unit_ball(points)))

    def words(self) -> str:
        return f"uniform in a ball of radius {spelled(self.radius, 'm')}"


class Ellipsoid(ShapeForm):
    """Uniform density within an ellipsoid whose axes are x, y and z."""

    kind: Literal["ellipsoid"]
    semi_axes: tuple[Positive[Length], Positive[Length], Positive[Length]] = key(
        "from the centre to the surface along x, y, z", example=["1 mm", "1 mm", "3 mm"]
    )
    placing: Placing = key(_PLACING, default="random")

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        points = draws.unit_points("place", count, 3, self.placing)
        return Placement(self.moved(np.array(self.semi_axes)[:, None] * in_unit_ball(points)))

    def words(self) -> str:
        return f"uniform in an ellipsoid of semi-axes {each_in_words(self.semi_axes, 'm', ' x ')}"
