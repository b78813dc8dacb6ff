"""Charges on a straight line between two points."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.forms import Point, checked, key, refuse
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.in_words import point_in_words
from driftwell.particles.shapes.form import Placement, ShapeForm


class Line(ShapeForm):
    """Charges on a straight line. Along its length L the variance is L^2/12 when random."""

    kind: Literal["line"]
    start: Point = key("one end", example=["0 mm", "0 mm", "-1 mm"])
    end: Point = key("the other end", example=["0 mm", "0 mm", "1 mm"])
    placing: Placing = key(
        "even: equal distances from end to end, a charge on each end, a single one in the middle; "
        "random: independent of each other",
        default="even",
    )

    @checked
    def _consistent(self) -> Self:
        if self.start == self.end:
            raise refuse("`start` and `end` must be two different points")
        return self

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        if self.placing == "random":
            part = draws.unit_points("place", count, 1)[0]
        else:
            part = np.arange(count) / (count - 1) if count > 1 else np.full(count, 0.5)
        start, end = np.array(self.start)[:, None], np.array(self.end)[:, None]
        return Placement(self.moved((1.0 - part) * start + part * end))

    def words(self) -> str:
        ends = f"from {point_in_words(self.start)} to {point_in_words(self.end)}"
        return f"{self.placing} on a line {ends}"
