"""A cylinder, filled evenly."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

import numpy as np

from driftwell.forms import Direction, Length, Positive, key
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.frame import frame
from driftwell.particles.shapes.form import Placement, ShapeForm


class Cylinder(ShapeForm):
    """Uniform density within a round cylinder about `centre`.

    The variance is radius^2/4 on each axis across and length^2/12 along.
    """

    kind: Literal["cylinder"]
    radius: Positive[Length] = key("radius of the cylinder", example="1 mm")
    length: Positive[Length] = key("length of the cylinder, from end to end", example="20 mm")
    axis: Direction = key("direction of its axis, any length but zero", default=(0.0, 0.0, 1.0))
    placing: Placing = key(
        "random: independent of each other; even: a low-discrepancy sequence", default="random"
    )

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        points = draws.unit_points("place", count, 3, self.placing)
        across = self.radius * np.sqrt(points[0])
        angle = 2.0 * np.pi * points[1]
        along = self.length * (points[2] - 0.5)
        own = np.array([across * np.cos(angle), across * np.sin(angle), along])
        return Placement(self.moved(frame(self.axis).T @ own))

    def words(self) -> str:
        return (
            f"uniform in a cylinder of radius {spelled(self.radius, 'm')} "
            f"and length {spelled(self.length, 'm')}"
        )
