"""A cone or frustum in space."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import AXIS, UPRIGHT, about, placed
from driftwell.forms import (
    Direction,
    Length,
    NonNegative,
    Point,
    Positive,
    checked,
    key,
    refuse,
    spelled,
)
from driftwell.geometry.outline import line, outline
from driftwell.geometry.solid import Revolved, Solid


class Cone(ShapeForm):
    """A solid cone, whole or cut off."""

    kind: Literal["cone"]
    centre: Point = key("the middle of its axis", example=["0 mm", "0 mm", "0 mm"])
    radii: tuple[NonNegative[Length], NonNegative[Length]] = key(
        "its radii where its axis begins and where it ends; one may be 0 mm",
        example=["4 mm", "1 mm"],
    )
    length: Positive[Length] = key("its length along its axis", example="6 mm")
    axis: Direction = key(AXIS, default=UPRIGHT)

    @checked
    def _not_a_line(self) -> Self:
        if max(self.radii) == 0.0:
            raise refuse("one of `radii` must be greater than 0")
        return self

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        (first, last), z = self.radii, 0.5 * self.length
        sides = [line((first, -z), (last, z))]
        if first > 0.0:
            sides.insert(0, line((0.0, -z), (first, -z)))
        if last > 0.0:
            sides.append(line((last, z), (0.0, z)))
        return (Revolved(outline([sides], solid=True), placed(self.centre, self.axis)),)

    def words(self) -> str:
        radii = " and ".join(spelled(radius, "m") for radius in self.radii)
        where = about(self.centre, self.axis)
        return f"cone {where}, radii {radii}, length {spelled(self.length, 'm')}"
