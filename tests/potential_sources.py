"""Potentials in closed form, for maps to be made of: spheres, point charges, charged rings.

All are e unit solutions at points (n, d), as `driftwell.fields.maps.source.PotentialSource`.
"""

from __future__ import annotations

import numpy as np
from scipy.special import ellipe, ellipk


class PointCharges:
    """1/r about charges at (e, 3) places, one solution each."""

    def __init__(self, places: list[tuple[float, float, float]]) -> None:
        self.places = np.array(places)

    def potential(self, points: np.ndarray) -> np.ndarray:
        away = points[None] - self.places[:, None]
        return 1.0 / np.linalg.norm(away, axis=2)

    def field(self, points: np.ndarray) -> np.ndarray:
        away = points[None] - self.places[:, None]
        return away / np.linalg.norm(away, axis=2)[..., None] ** 3


class LineCharge:
    """-ln r about a line along z through (x, y), in the plane."""

    def __init__(self, x: float, y: float) -> None:
        self.place = np.array([x, y])

    def potential(self, points: np.ndarray) -> np.ndarray:
        return -np.log(np.linalg.norm(points - self.place, axis=1))[None]

    def field(self, points: np.ndarray) -> np.ndarray:
        away = points - self.place
        return (away / np.sum(away**2, axis=1)[:, None])[None]


class Ring:
    """A charged ring about the axis, in (r, z).

    By complete elliptic integrals (from memory); the tests compare its field with differences of
    its potential.
    """

    def __init__(self, radius: float, height: float) -> None:
        self.radius, self.height = radius, height

    def potential(self, points: np.ndarray) -> np.ndarray:
        r, z = np.abs(points[:, 0]), points[:, 1] - self.height
        span = np.hypot(r + self.radius, z)
        return (2.0 / np.pi * ellipk(4.0 * r * self.radius / span**2) / span)[None]

    def field(self, points: np.ndarray) -> np.ndarray:
        r, z = points[:, 0], points[:, 1] - self.height
        span, near = np.hypot(r + self.radius, z), (self.radius - r) ** 2 + z**2
        m = 4.0 * r * self.radius / span**2
        axial = 2.0 / np.pi * z * ellipe(m) / (span * near)
        part = (self.radius**2 - r**2 + z**2) / near
        radial = (ellipk(m) - part * ellipe(m)) / (np.pi * np.where(r > 0.0, r, 1.0) * span)
        return np.stack([np.where(r > 0.0, radial, 0.0), axial], axis=1)[None]


class Sphere:
    """A conducting sphere at 1 V: a/r outside, 1 inside. Points of 2 coordinates are (r, z)."""

    def __init__(self, radius: float) -> None:
        self.radius = radius
        self.asked = 0

    def depth(self, points: np.ndarray) -> np.ndarray:
        return np.linalg.norm(points, axis=1) - self.radius

    def potential(self, points: np.ndarray) -> np.ndarray:
        self.asked += len(points)
        away = np.maximum(np.linalg.norm(points, axis=1), self.radius)
        return (self.radius / away)[None]

    def field(self, points: np.ndarray) -> np.ndarray:
        away = np.linalg.norm(points, axis=1)[:, None]
        outside = self.radius * points / np.maximum(away, self.radius) ** 3
        return np.where(away > self.radius, outside, 0.0)[None]


class TwoSpheres:
    """Two conducting spheres on the axis, each at 1 V in turn, by image charges; in (r, z).

    W. R. Smythe, Static and Dynamic Electricity, 3rd ed. (1968), sec. 5.08 (from memory).
    """

    def __init__(self, radius: float, height: float, images: int = 60) -> None:
        self.radius, self.height = radius, height
        self.charges = []
        for sign in (1.0, -1.0):
            z, q, other = sign * height, radius, -sign * height
            found = [(z, q)]
            for _ in range(images):
                q *= -radius / abs(z - other)
                z = other + radius**2 / (z - other)
                found.append((z, q))
                other = -other
            self.charges.append(np.array(found))

    def depth(self, points: np.ndarray) -> np.ndarray:
        r, z = points.T
        return np.minimum(np.hypot(r, z - self.height), np.hypot(r, z + self.height)) - self.radius

    def potential(self, points: np.ndarray) -> np.ndarray:
        inside = self.depth(points) <= 0.0
        out = []
        for sign, charges in zip((1.0, -1.0), self.charges, strict=True):
            away = np.hypot(points[:, 0], points[:, 1] - charges[:, :1])
            sums = np.sum(charges[:, 1:] / np.maximum(away, 1e-12), axis=0)
            own = (points[:, 1] * sign > 0.0).astype(float)
            out.append(np.where(inside, own, sums))
        return np.array(out)

    def field(self, points: np.ndarray) -> np.ndarray:
        out = []
        for charges in self.charges:
            r = np.broadcast_to(points[:, 0], (len(charges), len(points)))
            z = points[:, 1] - charges[:, :1]
            parts = charges[:, 1:] / np.maximum(np.hypot(r, z), 1e-12) ** 3
            out.append(np.stack([np.sum(parts * r, axis=0), np.sum(parts * z, axis=0)], axis=1))
        found = np.array(out)
        found[:, self.depth(points) <= 0.0] = 0.0
        return found
