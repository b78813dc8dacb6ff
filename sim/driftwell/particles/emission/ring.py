"""Charges from a flat ring, uniform over its area."""

from __future__ import annotations

import math
from collections.abc import Sequence
from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.forms import Direction, Length, Point, Positive, checked, key, refuse
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.geometry.solid import Solid
from driftwell.particles.draws import Draws
from driftwell.particles.emission.form import LIFT, EmitterForm, Leaving, repeated
from driftwell.particles.frame import frame


class RingEmitter(EmitterForm):
    """A flat ring that emits to the side its axis points to."""

    kind: Literal["ring"]
    inner_radius: Positive[Length] = key("radius of the hole", example="1 mm")
    radius: Positive[Length] = key("outer radius", example="2 mm")
    centre: Point = key("its middle", default=(0.0, 0.0, 0.0))
    axis: Direction = key(
        "direction in which charges leave, any length but zero", default=(0.0, 0.0, 1.0)
    )

    @checked
    def _ordered(self) -> Self:
        if self.inner_radius >= self.radius:
            raise refuse("`inner_radius` must be less than `radius`")
        return self

    def has_area(self) -> bool:
        return True

    def area(self, solids: Sequence[Solid]) -> float:
        return math.pi * (self.radius**2 - self.inner_radius**2)

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        return on_flat_ring(count, draws, self.centre, self.axis, self.inner_radius, self.radius)

    def words(self) -> str:
        inner, outer = spelled(self.inner_radius, "m"), spelled(self.radius, "m")
        return f"from a flat ring of radii {inner} and {outer}"


def on_flat_ring(
    count: int,
    draws: Draws,
    centre: tuple[float, float, float],
    axis: tuple[float, float, float],
    inner: float,
    outer: float,
) -> Leaving:
    """Places uniform over the area between two radii, m, about an axis."""
    points = draws.unit_points("place", count, 2)
    radius = np.sqrt(inner**2 + points[0] * (outer**2 - inner**2))
    angle = 2.0 * np.pi * points[1]
    first, second, along = frame(axis)[:, :, None]
    flat = radius * (np.cos(angle) * first + np.sin(angle) * second)
    middle = np.array(centre)[:, None] + LIFT * outer * along
    return Leaving(np.asarray(middle + flat), repeated(axis, count))
