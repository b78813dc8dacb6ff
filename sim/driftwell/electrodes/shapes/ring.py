"""A ring in space, of round or rectangular section."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import AXIS, UPRIGHT, about, placed
from driftwell.forms import Direction, Length, Point, Positive, checked, key, refuse, spelled
from driftwell.geometry.outline import circle, rectangle
from driftwell.geometry.solid import Revolved, Solid


class Ring(ShapeForm):
    """A ring about its axis."""

    kind: Literal["ring"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "0 mm"])
    radius: Positive[Length] = key("from its axis to the middle of its section", example="8 mm")
    section_radius: Positive[Length] | None = key("radius of a round section", default=None)
    section: tuple[Positive[Length], Positive[Length]] | None = key(
        "lengths of a rectangular section, away from the axis and along it", default=None
    )
    axis: Direction = key(AXIS, default=UPRIGHT)

    @checked
    def _one_section(self) -> Self:
        if (self.section_radius is None) == (self.section is None):
            raise refuse("needs either `section_radius` or `section`")
        if self._half() >= self.radius:
            raise refuse("its section must not reach its axis; use a sphere, a rod or a plate")
        return self

    def _half(self) -> float:
        """Half its section's length away from the axis, m."""
        if self.section_radius is not None:
            return self.section_radius
        return 0.5 * self.section[0] if self.section is not None else 0.0

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        r, half = self.radius, self._half()
        drawn = circle((r, 0.0), half)
        if self.section is not None:
            z = 0.5 * self.section[1]
            drawn = rectangle((r - half, -z), (r + half, z))
        return (Revolved(drawn, placed(self.centre, self.axis)),)

    def words(self) -> str:
        section = f"of radius {spelled(self._half(), 'm')}"
        if self.section is not None:
            section = " x ".join(spelled(length, "m") for length in self.section)
        where = about(self.centre, self.axis)
        return f"ring {where}, radius {spelled(self.radius, 'm')}, section {section}"
