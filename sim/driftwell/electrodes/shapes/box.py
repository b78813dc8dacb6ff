"""A box in space."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import AXIS, TURN, UPRIGHT, about, placed
from driftwell.forms import Angle, Direction, Length, Point, Positive, key, spelled
from driftwell.geometry.outline import rectangle
from driftwell.geometry.solid import Extruded, Solid


class Box(ShapeForm):
    """A solid box."""

    kind: Literal["box"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "5 mm"])
    size: tuple[Positive[Length], Positive[Length], Positive[Length]] = key(
        "its lengths along its own x, y and z", example=["10 mm", "10 mm", "2 mm"]
    )
    axis: Direction = key(AXIS, default=UPRIGHT)
    turn: Angle = key(TURN, default=0.0)

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        x, y, z = (0.5 * length for length in self.size)
        frame = placed(self.centre, self.axis, self.turn)
        return (Extruded(rectangle((-x, -y), (x, y)), z, frame),)

    def words(self) -> str:
        size = " x ".join(spelled(length, "m") for length in self.size)
        return f"box of {size} {about(self.centre, self.axis)}"
