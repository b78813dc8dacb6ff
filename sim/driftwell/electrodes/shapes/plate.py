"""A rectangular plate in space, with holes and slits."""

from __future__ import annotations

import math
from itertools import combinations
from pathlib import Path
from typing import Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.placing import TURN, UPRIGHT, about, placed
from driftwell.forms import (
    Angle,
    Direction,
    Form,
    Length,
    NonNegative,
    Point,
    Positive,
    checked,
    key,
    refuse,
    spelled,
)
from driftwell.geometry.outline import Outline, arc, circle, line, outline, rectangle
from driftwell.geometry.solid import Extruded, Solid

Place = tuple[Length, Length]
_ALONG = 33
"""Points along a slit's middle line at which distances are taken."""


class Hole(Form):
    """A round hole through a plate."""

    at: Place = key("its middle, in the plate's own x and y", default=(0.0, 0.0))
    radius: Positive[Length] = key("its radius", example="1 mm")

    def outline(self) -> Outline:
        """Its border."""
        return circle(self.at, self.radius)

    def middle_line(self) -> NDArray[np.float64]:
        """(n, 2), m: points that all of its border is `reach` away from."""
        return np.array([self.at])

    def reach(self) -> float:
        """Distance of the border from the middle line, m."""
        return self.radius


class Slit(Form):
    """A straight slit through a plate, its ends round."""

    at: Place = key("its middle, in the plate's own x and y", default=(0.0, 0.0))
    length: Positive[Length] = key("its length, with its round ends", example="10 mm")
    width: Positive[Length] = key("its width", example="0.5 mm")
    angle: Angle = key("direction of its length, counted from the plate's own x", default=0.0)

    @checked
    def _longer(self) -> Self:
        if not self.length > self.width:
            raise refuse("`length` must be greater than `width`; else use a hole")
        return self

    def _ends(self) -> tuple[tuple[float, float], tuple[float, float]]:
        half = 0.5 * (self.length - self.width)
        dx, dy = half * math.cos(self.angle), half * math.sin(self.angle)
        x, y = self.at
        return (x - dx, y - dy), (x + dx, y + dy)

    def outline(self) -> Outline:
        """Its border."""
        first, last = self._ends()
        radius = 0.5 * self.width
        sx, sy = radius * math.sin(self.angle), -radius * math.cos(self.angle)
        corners = [(p[0] + s * sx, p[1] + s * sy) for p, s in ((first, 1), (last, 1))]
        back = [(p[0] - sx, p[1] - sy) for p in (last, first)]
        return outline(
            [
                [
                    line(corners[0], corners[1]),
                    arc(corners[1], back[0], last, math.pi),
                    line(back[0], back[1]),
                    arc(back[1], corners[0], first, math.pi),
                ]
            ],
            solid=True,
        )

    def middle_line(self) -> NDArray[np.float64]:
        """(n, 2), m: points that all of its border is `reach` away from."""
        first, last = (np.array(end) for end in self._ends())
        return np.asarray(first + np.linspace(0.0, 1.0, _ALONG)[:, None] * (last - first))

    def reach(self) -> float:
        """Distance of the border from the middle line, m."""
        return 0.5 * self.width


class Plate(ShapeForm):
    """A flat plate, or a sheet without thickness."""

    kind: Literal["plate"]
    centre: Point = key("its middle", example=["0 mm", "0 mm", "5 mm"])
    size: tuple[Positive[Length], Positive[Length]] = key(
        "its lengths along its own x and y", example=["20 mm", "20 mm"]
    )
    thickness: NonNegative[Length] = key("its thickness; 0 mm for a sheet", example="0.5 mm")
    axis: Direction = key("direction across the plate; any length but 0", default=UPRIGHT)
    turn: Angle = key(TURN, default=0.0)
    holes: tuple[Hole, ...] = key("round holes", default=())
    slits: tuple[Slit, ...] = key("slits", default=())

    @checked
    def _apart(self) -> Self:
        half = 0.5 * np.array(self.size)
        openings: list[Hole | Slit] = [*self.holes, *self.slits]
        for opening in openings:
            if np.any(np.abs(opening.middle_line()) + opening.reach() >= half):
                raise refuse("holes and slits must lie within the plate and not reach its edge")
        for one, other in combinations(openings, 2):
            apart = one.middle_line()[:, None] - other.middle_line()[None]
            nearest = float(np.min(np.hypot(apart[..., 0], apart[..., 1])))
            if nearest <= one.reach() + other.reach():
                raise refuse("holes and slits must not overlap")
        return self

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        x, y = (0.5 * length for length in self.size)
        area = rectangle((-x, -y), (x, y))
        openings: list[Hole | Slit] = [*self.holes, *self.slits]
        for opening in openings:
            area = area.joined(opening.outline())
        frame = placed(self.centre, self.axis, self.turn)
        return (Extruded(area, 0.5 * self.thickness, frame),)

    def words(self) -> str:
        size = " x ".join(spelled(length, "m") for length in (*self.size, self.thickness))
        parts = [
            f"{len(each)} {word}{'s' * (len(each) != 1)}"
            for each, word in ((self.holes, "hole"), (self.slits, "slit"))
            if each
        ]
        with_them = f" with {' and '.join(parts)}" if parts else ""
        return f"plate of {size}{with_them} {about(self.centre, self.axis)}"
