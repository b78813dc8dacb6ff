"""A circle in the plane: of planar electrodes a round rod, of axisymmetric ones a torus."""

from __future__ import annotations

from typing import Literal

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms import Length, Positive, key, spelled
from driftwell.geometry import outline


class Circle(ShapeForm):
    """A full circle, in (r, z) or (x, y)."""

    kind: Literal["circle"]
    centre: tuple[Length, Length] = key("its centre", example=["9.2 mm", "0 mm"])
    radius: Positive[Length] = key("its radius", example="4.6 mm")

    def drawn(self) -> bool:
        return True

    def outline(self, geometry: Geometry) -> outline.Outline:
        return outline.circle(self.centre, self.radius)

    def words(self) -> str:
        at = ", ".join(spelled(x, "m") for x in self.centre)
        return f"circle about ({at}), radius {spelled(self.radius, 'm')}"
