"""A round tube in space."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import AXIS, UPRIGHT, about, placed
from driftwell.forms import Direction, Length, NonNegative, Point, Positive, key, spelled
from driftwell.geometry.outline import line, outline, rectangle
from driftwell.geometry.solid import Revolved, Solid


class Tube(ShapeForm):
    """A tube open at both ends."""

    kind: Literal["tube"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "0 mm"])
    radius: Positive[Length] = key("its inner radius", example="5 mm")
    thickness: NonNegative[Length] = key("thickness of its wall; 0 mm for a sheet", example="1 mm")
    length: Positive[Length] = key("its length", example="20 mm")
    axis: Direction = key(AXIS, default=UPRIGHT)

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        r, z = self.radius, 0.5 * self.length
        if self.thickness > 0.0:
            drawn = rectangle((r, -z), (r + self.thickness, z))
        else:
            drawn = outline([[line((r, -z), (r, z))]], solid=False)
        return (Revolved(drawn, placed(self.centre, self.axis)),)

    def words(self) -> str:
        inner, wall, length = (spelled(x, "m") for x in (self.radius, self.thickness, self.length))
        where = about(self.centre, self.axis)
        return f"tube {where}, inner radius {inner}, wall {wall}, length {length}"
