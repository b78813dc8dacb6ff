"""A rectangle in the plane: of axisymmetric electrodes a tube, a ring, or a plate with a hole."""

from __future__ import annotations

from typing import Literal, Self

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms import Length, checked, key, refuse, spelled
from driftwell.forms.faults import Fault
from driftwell.geometry import outline
from driftwell.geometry.revolution import without_axis


class Rectangle(ShapeForm):
    """A rectangle between two corners, in (r, z) or (x, y)."""

    kind: Literal["rectangle"]
    low: tuple[Length, Length] = key("the corner of least coordinates", example=["5 mm", "-10 mm"])
    high: tuple[Length, Length] = key("the opposite corner", example=["6 mm", "10 mm"])

    @checked
    def _ordered(self) -> Self:
        if not (self.low[0] < self.high[0] and self.low[1] < self.high[1]):
            raise refuse("both coordinates of `low` must be less than those of `high`")
        return self

    def drawn(self) -> bool:
        return True

    def faults(self, geometry: Geometry) -> list[Fault]:
        if geometry == "axisymmetric" and self.low[0] < 0.0:
            return [Fault(("low",), spelled(self.low[0], "m"), "r must not be negative")]
        return []

    def outline(self, geometry: Geometry) -> outline.Outline:
        drawn = outline.rectangle(self.low, self.high)
        if geometry == "axisymmetric" and self.low[0] == 0.0:
            return without_axis([list(drawn.pieces)], solid=True)
        return drawn

    def words(self) -> str:
        low, high = (", ".join(spelled(x, "m") for x in corner) for corner in (self.low, self.high))
        return f"rectangle from ({low}) to ({high})"
