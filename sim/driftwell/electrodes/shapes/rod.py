"""A round rod in space."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import AXIS, UPRIGHT, about, placed
from driftwell.forms import Direction, Length, Point, Positive, key, spelled
from driftwell.geometry.outline import line, outline
from driftwell.geometry.solid import Revolved, Solid


class Rod(ShapeForm):
    """A solid cylinder with flat ends."""

    kind: Literal["rod"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "0 mm"])
    radius: Positive[Length] = key("its radius", example="3 mm")
    length: Positive[Length] = key("its length", example="40 mm")
    axis: Direction = key(AXIS, default=UPRIGHT)

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        r, z = self.radius, 0.5 * self.length
        sides = [line((0.0, -z), (r, -z)), line((r, -z), (r, z)), line((r, z), (0.0, z))]
        return (Revolved(outline([sides], solid=True), placed(self.centre, self.axis)),)

    def words(self) -> str:
        size = f"radius {spelled(self.radius, 'm')}, length {spelled(self.length, 'm')}"
        return f"rod {about(self.centre, self.axis)}, {size}"
