"""A sphere in space."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Literal

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import UPRIGHT, about, placed
from driftwell.forms import Length, Point, Positive, key, spelled
from driftwell.geometry.outline import arc, outline
from driftwell.geometry.solid import Revolved, Solid


class Sphere(ShapeForm):
    """A solid sphere."""

    kind: Literal["sphere"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "0 mm"])
    radius: Positive[Length] = key("its radius", example="3 mm")

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        r = self.radius
        half = arc((0.0, -r), (0.0, r), (0.0, 0.0), math.pi)
        return (Revolved(outline([[half]], solid=True), placed(self.centre, UPRIGHT)),)

    def words(self) -> str:
        return f"sphere {about(self.centre)}, radius {spelled(self.radius, 'm')}"
