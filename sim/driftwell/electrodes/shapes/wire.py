"""A wire in space: a thin rod with round ends."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import placed
from driftwell.forms import Length, Point, Positive, checked, key, refuse, spelled
from driftwell.geometry.outline import arc, line, outline
from driftwell.geometry.solid import Revolved, Solid


class Wire(ShapeForm):
    """A straight round wire; half spheres about its end points close it."""

    kind: Literal["wire"]
    start: Point = key("where it begins", example=["0 mm", "-10 mm", "0 mm"])
    end: Point = key("where it ends", example=["0 mm", "10 mm", "0 mm"])
    radius: Positive[Length] = key("its radius", example="50 um")

    @checked
    def _long(self) -> Self:
        if math.dist(self.start, self.end) == 0.0:
            raise refuse("`start` and `end` must be different places; else use a sphere")
        return self

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        first, last = np.array(self.start), np.array(self.end)
        length = math.dist(self.start, self.end)
        r, z = self.radius, 0.5 * length
        x, y, w = ((last - first) / length).tolist()
        cx, cy, cz = (0.5 * (first + last)).tolist()
        sides = [
            arc((0.0, -z - r), (r, -z), (0.0, -z), 0.5 * math.pi),
            line((r, -z), (r, z)),
            arc((r, z), (0.0, z + r), (0.0, z), 0.5 * math.pi),
        ]
        return (Revolved(outline([sides], solid=True), placed((cx, cy, cz), (x, y, w))),)

    def words(self) -> str:
        start, end = (", ".join(spelled(x, "m") for x in p) for p in (self.start, self.end))
        return f"wire from ({start}) to ({end}), radius {spelled(self.radius, 'm')}"
