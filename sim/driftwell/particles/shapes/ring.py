"""Charges on a circle."""

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


class Ring(ShapeForm):
    """Charges on a circle about `centre`. In its plane the variance is radius^2/2 on each axis."""

    kind: Literal["ring"]
    radius: Positive[Length] = key("radius of the circle", example="1 mm")
    axis: Direction = key(
        "direction perpendicular to the circle, any length but zero", default=(0.0, 0.0, 1.0)
    )
    placing: Placing = key(
        "even: equal angles; the first charge lies in the direction of x about axis z, of y about "
        "x, of z about y; random: independent of each other",
        default="even",
    )

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        if self.placing == "random":
            part = draws.unit_points("place", count, 1)[0]
        else:
            part = np.arange(count) / max(count, 1)
        angle = 2.0 * np.pi * part
        first, second, _ = frame(self.axis)[:, :, None]
        return Placement(self.moved(self.radius * (np.cos(angle) * first + np.sin(angle) * second)))

    def words(self) -> str:
        return f"{self.placing} on a ring of radius {spelled(self.radius, 'm')}"
