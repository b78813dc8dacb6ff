"""Plane wall with a round or slit-shaped opening, and plane detector."""

from __future__ import annotations

import math
from typing import Literal, Self

import numpy as np

from driftwell.forms import Form, Length, Positive, Real, checked, key, refuse
from driftwell.kernels import inner_kernel
from driftwell.walls.form import EFFECT, PASS, DetectorForm, PackedSurface, WallForm

PLANE = 3
Vector = tuple[float, float, float]

_NO_OPENING, _ROUND, _SLIT, _DISC = 0.0, 1.0, 2.0, 3.0


def _unit(vector: Vector) -> Vector:
    length = math.hypot(*vector)
    return vector[0] / length, vector[1] / length, vector[2] / length


class RoundOpening(Form):
    """A round hole about the plane's point `at`."""

    radius: Positive[Length] = key("radius of the hole", example="2 mm")


class SlitOpening(Form):
    """An endless slit through the plane's point `at`."""

    width: Positive[Length] = key("full width of the slit", example="1 mm")
    along: tuple[Real, Real, Real] = key(
        "direction of the slit, within the plane", default=(0.0, 1.0, 0.0)
    )


class Plane(WallForm):
    """An endless plane that stops charges from both sides, save through its opening."""

    kind: Literal["plane"]
    at: tuple[Length, Length, Length] = key(
        "a point of the plane; the middle of its opening", example=["0 mm", "0 mm", "40 mm"]
    )
    normal: tuple[Real, Real, Real] = key(
        "direction across the plane; any length but zero", default=(0.0, 0.0, 1.0)
    )
    hole: RoundOpening | None = key("a round opening", default=None)
    slit: SlitOpening | None = key("a slit-shaped opening", default=None)

    @checked
    def _sensible(self) -> Self:
        if math.hypot(*self.normal) == 0.0:
            raise refuse("`normal` must have a length")
        if self.hole is not None and self.slit is not None:
            raise refuse("give either `hole` or `slit`, not both")
        if self.slit is not None:
            length = math.hypot(*self.slit.along)
            across = sum(a * b for a, b in zip(_unit(self.normal), self.slit.along, strict=True))
            if length == 0.0 or abs(across) > 1e-9 * length:
                raise refuse("`slit.along` must lie in the plane: at a right angle to `normal`")
        return self

    def packed(self) -> PackedSurface:
        opening, size, along = _NO_OPENING, 0.0, (0.0, 0.0, 0.0)
        if self.hole is not None:
            opening, size = _ROUND, self.hole.radius
        elif self.slit is not None:
            opening, size, along = _SLIT, 0.5 * self.slit.width, _unit(self.slit.along)
        return PackedSurface(
            PLANE, EFFECT[self.effect], (*self.at, *_unit(self.normal), opening, size, *along)
        )

    def words(self) -> str:
        where = ", ".join(f"{value * 1e3:.6g}" for value in self.at)
        opening = "without opening"
        if self.hole is not None:
            opening = f"with a hole of radius {self.hole.radius * 1e3:.6g} mm"
        elif self.slit is not None:
            opening = f"with a slit {self.slit.width * 1e3:.6g} mm wide"
        return f"plane through ({where}) mm, {opening}"


class PlaneDetector(DetectorForm):
    """A plane that records every charge passing it, without touching it."""

    kind: Literal["plane"]
    at: tuple[Length, Length, Length] = key(
        "a point of the plane, the middle of the disc where `radius` is given",
        example=["0 mm", "0 mm", "40 mm"],
    )
    normal: tuple[Real, Real, Real] = key(
        "direction counted as +1; any length but zero", default=(0.0, 0.0, 1.0)
    )
    radius: Positive[Length] | None = key(
        "record only within this distance of `at`; left out: everywhere", default=None
    )

    @checked
    def _sensible(self) -> Self:
        if math.hypot(*self.normal) == 0.0:
            raise refuse("`normal` must have a length")
        return self

    def packed(self) -> PackedSurface:
        radius = np.inf if self.radius is None else self.radius
        return PackedSurface(PLANE, PASS, (*self.at, *_unit(self.normal), _DISC, radius))

    def words(self) -> str:
        where = ", ".join(f"{value * 1e3:.6g}" for value in self.at)
        size = "" if self.radius is None else f", within {self.radius * 1e3:.6g} mm"
        return f"plane detector at ({where}) mm{size}"


@inner_kernel
def plane_level(p: np.ndarray, x: float, y: float, z: float) -> float:
    """Signed distance along the normal, m."""
    return p[3] * (x - p[0]) + p[4] * (y - p[1]) + p[5] * (z - p[2])


@inner_kernel
def plane_stops(p: np.ndarray, x: float, y: float, z: float) -> bool:
    """Whether a point of the plane is solid (a wall) or sensitive (a detector)."""
    dx, dy, dz = x - p[0], y - p[1], z - p[2]
    opening = p[6]
    if opening == _NO_OPENING:
        return True
    distance2 = dx * dx + dy * dy + dz * dz
    if opening == _ROUND:
        return distance2 > p[7] * p[7]
    if opening == _SLIT:
        along = dx * p[8] + dy * p[9] + dz * p[10]
        return distance2 - along * along > p[7] * p[7]
    return distance2 <= p[7] * p[7]


@inner_kernel
def plane_normal(p: np.ndarray) -> tuple[float, float, float]:
    """Direction in which the level rises."""
    return p[3], p[4], p[5]
