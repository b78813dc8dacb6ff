"""A circle: of planar electrodes a round rod, of axisymmetric ones a torus or a ball."""

from __future__ import annotations

from typing import Literal

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms import Length, Positive, key, spelled
from driftwell.forms.faults import Fault
from driftwell.geometry import outline
from driftwell.geometry.revolution import half_circle


class Circle(ShapeForm):
    """A full circle, in (r, z) or (x, y); about z, with its centre on the axis, a ball."""

    kind: Literal["circle"]
    centre: tuple[Length, Length] = key("its centre", example=["9.2 mm", "0 mm"])
    radius: Positive[Length] = key("its radius", example="4.6 mm")

    def drawn(self) -> bool:
        return True

    def faults(self, geometry: Geometry) -> list[Fault]:
        r = self.centre[0]
        if geometry != "axisymmetric" or r == 0.0 or r > self.radius:
            return []
        text = (
            f"must be 0 (a ball) or greater than the radius, {spelled(self.radius, 'm')} "
            "(a torus): the circle meets the axis"
        )
        return [Fault(("centre", 0), spelled(r, "m"), text)]

    def outline(self, geometry: Geometry) -> outline.Outline:
        if geometry == "axisymmetric" and self.centre[0] == 0.0:
            return outline.outline([half_circle(self.centre[1], self.radius)], solid=True)
        return outline.circle(self.centre, self.radius)

    def words(self) -> str:
        at = ", ".join(spelled(x, "m") for x in self.centre)
        return f"circle about ({at}), radius {spelled(self.radius, 'm')}"
