"""The scenario's [cell] section: what is simulated repeats without end along one axis."""

from __future__ import annotations

from typing import Literal

from driftwell.forms import Form, Length, Positive, key, spelled

_AXES = ("x", "y", "z")


class Cell(Form):
    """A stretch of an endless beam or of a train of bunches, which repeats along one axis.

    What leaves at one end comes in at the other, and all images of a charge push.
    """

    axis: Literal["x", "y", "z"] = key("axis along which everything repeats", default="z")
    length: Positive[Length] = key("period: distance from one end to the other", example="20 mm")
    start: Length | None = key(
        "coordinate of the end where charges moving forward come in; left out: half a length "
        "before the origin",
        default=None,
        example="-10 mm",
    )

    @property
    def number(self) -> int:
        """The axis as 0, 1 or 2."""
        return _AXES.index(self.axis)

    @property
    def begin(self) -> float:
        """Coordinate of the first end, m."""
        return -0.5 * self.length if self.start is None else self.start

    def words(self) -> str:
        """The cell in words."""
        begin, end = spelled(self.begin, "m"), spelled(self.begin + self.length, "m")
        return f"repeats along {self.axis}, period {spelled(self.length, 'm')}, {begin} to {end}"
