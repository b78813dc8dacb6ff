"""A Gaussian cloud."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Literal, Self

import numpy as np

from driftwell.forms import Length, NonNegative, checked, key, on_each_axis, per_axis, refuse
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.in_words import each_in_words
from driftwell.particles.shapes.form import Placement, ShapeForm

if TYPE_CHECKING:
    LengthPerAxis = float | tuple[float, float, float]
else:
    LengthPerAxis = per_axis(NonNegative[Length])


class Gaussian(ShapeForm):
    """Normal distribution with a standard deviation for each axis, without cut."""

    kind: Literal["gaussian"]
    sigma: LengthPerAxis = key(
        "standard deviation: one for all axes, or a list for x, y, z",
        example=["60 um", "60 um", "250 um"],
    )
    placing: Placing = key(
        "random: independent of each other; even: a low-discrepancy sequence", default="random"
    )

    @checked
    def _extended(self) -> Self:
        if not any(on_each_axis(self.sigma)):
            raise refuse("`sigma` must be greater than 0 on at least one axis")
        return self

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        from scipy.special import ndtri

        sigma = np.array(on_each_axis(self.sigma))[:, None]
        points = draws.unit_points("place", count, 3, self.placing)
        return Placement(self.moved(sigma * ndtri(points)))

    def words(self) -> str:
        return f"Gaussian of rms size {each_in_words(on_each_axis(self.sigma), 'm', ' x ')}"
