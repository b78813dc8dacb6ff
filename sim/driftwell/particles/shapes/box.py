"""A box, filled evenly."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Literal

import numpy as np

from driftwell.forms import Length, Positive, key, on_each_axis, per_axis
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.in_words import each_in_words
from driftwell.particles.shapes.form import Placement, ShapeForm

if TYPE_CHECKING:
    LengthPerAxis = float | tuple[float, float, float]
else:
    LengthPerAxis = per_axis(Positive[Length])


class Box(ShapeForm):
    """Uniform density within a box whose edges lie along x, y and z; variance edge^2/12."""

    kind: Literal["box"]
    size: LengthPerAxis = key(
        "edge length: one for a cube, or a list for x, y, z", example=["2 mm", "2 mm", "5 mm"]
    )
    placing: Placing = key(
        "random: independent of each other; even: a low-discrepancy sequence", default="random"
    )

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        points = draws.unit_points("place", count, 3, self.placing)
        return Placement(self.moved(np.array(on_each_axis(self.size))[:, None] * (points - 0.5)))

    def words(self) -> str:
        return f"uniform in a box of {each_in_words(on_each_axis(self.size), 'm', ' x ')}"
