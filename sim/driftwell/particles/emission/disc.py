"""Charges from a flat round surface, uniform over its area."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path
from typing import Literal

from driftwell.forms import Direction, Length, Point, Positive, key
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.geometry.solid import Solid
from driftwell.particles.draws import Draws
from driftwell.particles.emission.form import EmitterForm, Leaving
from driftwell.particles.emission.ring import on_flat_ring


class DiscEmitter(EmitterForm):
    """A disc that emits to the side its axis points to."""

    kind: Literal["disc"]
    radius: Positive[Length] = key("radius of the disc", example="2 mm")
    centre: Point = key("its middle", default=(0.0, 0.0, 0.0))
    axis: Direction = key(
        "direction in which charges leave, any length but zero", default=(0.0, 0.0, 1.0)
    )

    def has_area(self) -> bool:
        return True

    def area(self, solids: Sequence[Solid]) -> float:
        return math.pi * self.radius**2

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        return on_flat_ring(count, draws, self.centre, self.axis, 0.0, self.radius)

    def words(self) -> str:
        return f"from a disc of radius {spelled(self.radius, 'm')}"
