"""Bodies with charge 1 spread evenly over them: places of many charges, and the field they tend to.

Lengths in units of the body's size (radius 1, or half-length 1), 1/(4 pi eps0) = 1. Each body maps
points of the unit cube to places with the charge's own density; cylindrical bodies stand on z.
"""

from __future__ import annotations

from abc import ABC, abstractmethod

import numpy as np
from scipy.integrate import quad
from scipy.special import ellipe, ellipk

from tests.pair_sums import Floats

FAR = (3.0, -4.0, 2.0)


class Body(ABC):
    """A charged body: where its charges are, its potential and its field at one place."""

    name: str
    dimensions: int
    """Of the cube its points come from."""
    probes: tuple[tuple[float, float, float], ...]
    """Where the field is looked at, none of them near a charge."""

    @abstractmethod
    def places(self, cube: Floats) -> Floats:
        """Of charges (3, n) from points (n, dimensions) of the unit cube."""

    @abstractmethod
    def potential(self, place: Floats) -> float:
        """At one place (3,)."""

    @abstractmethod
    def field(self, place: Floats) -> Floats:
        """At one place (3,)."""

    def __str__(self) -> str:
        return self.name


def _on_sphere(height: Floats, turn: Floats) -> Floats:
    """Places (3, n) on the unit sphere from two coordinates of the cube."""
    z = 2.0 * height - 1.0
    rho = np.sqrt(1.0 - z**2)
    return np.array([rho * np.cos(2.0 * np.pi * turn), rho * np.sin(2.0 * np.pi * turn), z])


def _along(place: Floats, rho_part: float, z_part: float) -> Floats:
    """A field given by its parts along rho and z."""
    rho = np.hypot(place[0], place[1])
    out = np.array([place[0], place[1], 0.0]) * (rho_part / rho if rho else 0.0)
    out[2] = z_part
    return out


class Shell(Body):
    """A sphere's surface: a point's field outside, none inside.

    I. Newton, Principia (1687), book I, prop. 70 and 71; J. D. Jackson (1998), problem 1.1.
    """

    name = "shell"
    dimensions = 2
    probes = (
        (0.0, 0.0, 0.0),
        (0.3, -0.4, 0.2),
        (0.0, 0.0, -0.6),
        (1.0, 1.0, 0.5),
        (0.0, -3.0, 4.0),
    )

    def places(self, cube: Floats) -> Floats:
        return _on_sphere(cube[:, 0], cube[:, 1])

    def potential(self, place: Floats) -> float:
        return 1.0 / max(float(np.linalg.norm(place)), 1.0)

    def field(self, place: Floats) -> Floats:
        r = float(np.linalg.norm(place))
        return place / r**3 if r > 1.0 else np.zeros(3)


class Ball(Body):
    """A full sphere, seen from outside and from a hollow of radius 1/2 in its middle.

    Outside it is a point; with the hollow, inside nothing: Jackson (1998), problem 1.4.
    """

    name = "hollow ball"
    dimensions = 3
    probes = (
        (0.0, 0.0, 0.0),
        (0.1, -0.2, 0.15),
        (1.2, 0.0, 0.0),
        (-1.0, 1.0, 0.5),
        (0.0, -3.0, 4.0),
    )
    hollow = 0.5

    def places(self, cube: Floats) -> Floats:
        inner = self.hollow**3
        return (inner + (1.0 - inner) * cube[:, 2]) ** (1.0 / 3.0) * _on_sphere(
            cube[:, 0], cube[:, 1]
        )

    def potential(self, place: Floats) -> float:
        r, a = float(np.linalg.norm(place)), self.hollow
        return 1.0 / r if r > 1.0 else 1.5 * (1.0 - a**2) / (1.0 - a**3)

    def field(self, place: Floats) -> Floats:
        r = float(np.linalg.norm(place))
        return place / r**3 if r > 1.0 else np.zeros(3)


class Rod(Body):
    """A line from z = -1 to z = 1.

    With r = the distances from its ends: phi = ln((z + 1 + r_-) / (z - 1 + r_+)) / 2, and E its
    slope. O. D. Kellogg, Foundations of Potential Theory (1929), III.2 (from memory).
    """

    name = "rod"
    dimensions = 1
    probes = (
        (0.3, 0.0, 0.0),
        (0.2, 0.4, 0.9),
        (-0.5, 0.1, -1.3),
        (0.0, 0.0, 1.5),
        (3.0, -4.0, 2.0),
    )

    def places(self, cube: Floats) -> Floats:
        out = np.zeros((3, cube.shape[0]))
        out[2] = 2.0 * cube[:, 0] - 1.0
        return out

    def _ends(self, place: Floats) -> tuple[float, float, float, float]:
        rho, z = float(np.hypot(place[0], place[1])), float(place[2])
        return rho, z, float(np.hypot(rho, z + 1.0)), float(np.hypot(rho, z - 1.0))

    def potential(self, place: Floats) -> float:
        _, z, low, high = self._ends(place)
        return 0.5 * float(np.log((z + 1.0 + low) / (z - 1.0 + high)))

    def field(self, place: Floats) -> Floats:
        rho, z, low, high = self._ends(place)
        across = 0.5 * ((z + 1.0) / low - (z - 1.0) / high) / rho if rho else 0.0
        return _along(place, across, 0.5 * (1.0 / high - 1.0 / low))


def ring_potential(radius: float, rho: float, z: float) -> float:
    """Of a ring with charge 1: 2 K(m) / (pi s), m = 4 a rho / s^2, s^2 = (a + rho)^2 + z^2.

    Jackson (1998), sec. 3.3; DLMF ch. 19.
    """
    s2 = (radius + rho) ** 2 + z**2
    return float(2.0 * ellipk(4.0 * radius * rho / s2) / (np.pi * np.sqrt(s2)))


def ring_field(radius: float, rho: float, z: float) -> tuple[float, float]:
    """Parts along rho and z of a ring's field, the slopes of :func:`ring_potential`."""
    s2 = (radius + rho) ** 2 + z**2
    t2 = (radius - rho) ** 2 + z**2
    m = 4.0 * radius * rho / s2
    whole = 2.0 / (np.pi * np.sqrt(s2))
    along = whole * z * ellipe(m) / t2
    if rho == 0.0:
        return 0.0, float(along)
    across = whole / (2.0 * rho) * (ellipk(m) - (radius**2 - rho**2 + z**2) / t2 * ellipe(m))
    return float(across), float(along)


class Ring(Body):
    """A circle in the plane z = 0, by complete elliptic integrals."""

    name = "ring"
    dimensions = 1
    probes = (
        (0.0, 0.0, 0.0),
        (0.0, 0.0, 0.7),
        (0.5, 0.3, 0.2),
        (1.3, -0.5, -0.4),
        (3.0, -4.0, 2.0),
    )

    def places(self, cube: Floats) -> Floats:
        turn = 2.0 * np.pi * cube[:, 0]
        return np.array([np.cos(turn), np.sin(turn), np.zeros_like(turn)])

    def potential(self, place: Floats) -> float:
        return ring_potential(1.0, float(np.hypot(place[0], place[1])), float(place[2]))

    def field(self, place: Floats) -> Floats:
        return _along(place, *ring_field(1.0, float(np.hypot(place[0], place[1])), float(place[2])))


class Disc(Body):
    """A disc in the plane z = 0; on its axis E_z = 2 (1 - z / sqrt(z^2 + 1)) for z > 0.

    E. M. Purcell, D. J. Morin, Electricity and Magnetism, 3rd ed. (2013), sec. 2.6 (from memory);
    off the axis it is a sum of rings, by quadrature.
    """

    name = "disc"
    dimensions = 2
    probes = (
        (0.0, 0.0, 0.5),
        (0.0, 0.0, -2.0),
        (0.5, 0.3, 0.4),
        (1.3, -0.5, -0.4),
        (3.0, -4.0, 2.0),
    )

    def places(self, cube: Floats) -> Floats:
        rho, turn = np.sqrt(cube[:, 0]), 2.0 * np.pi * cube[:, 1]
        return np.array([rho * np.cos(turn), rho * np.sin(turn), np.zeros_like(turn)])

    def potential(self, place: Floats) -> float:
        rho, z = float(np.hypot(place[0], place[1])), float(place[2])
        if rho == 0.0:
            return 2.0 * float(np.hypot(z, 1.0) - abs(z))
        return float(quad(lambda a: 2.0 * a * ring_potential(a, rho, z), 0.0, 1.0)[0])

    def field(self, place: Floats) -> Floats:
        rho, z = float(np.hypot(place[0], place[1])), float(place[2])
        if rho == 0.0:
            return np.array([0.0, 0.0, 2.0 * np.sign(z) * (1.0 - abs(z) / np.hypot(z, 1.0))])
        parts = [
            quad(lambda a, k=k: 2.0 * a * ring_field(a, rho, z)[k], 0.0, 1.0)[0] for k in (0, 1)
        ]
        return _along(place, *parts)


BODIES = [Shell(), Ball(), Rod(), Disc(), Ring()]
