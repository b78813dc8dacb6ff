"""Clouds of unit charges that sums are timed on; lengths of about 1."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Cloud = Callable[[int], tuple[Floats, Floats]]
"""Number of charges -> places (3, n) and charges (n,), the same at every call."""


def _directions(random: np.random.Generator, n: int) -> Floats:
    out = random.normal(size=(3, n))
    out /= np.linalg.norm(out, axis=0)
    return out


def gaussian(n: int) -> tuple[Floats, Floats]:
    """A round Gaussian cloud."""
    return np.random.default_rng(1).normal(size=(3, n)), np.ones(n)


def ball(n: int) -> tuple[Floats, Floats]:
    """Even in a ball."""
    random = np.random.default_rng(2)
    return _directions(random, n) * random.uniform(size=n) ** (1.0 / 3.0), np.ones(n)


def cube(n: int) -> tuple[Floats, Floats]:
    """Even in a cube."""
    return np.random.default_rng(3).uniform(-1.0, 1.0, (3, n)), np.ones(n)


def plummer(n: int) -> tuple[Floats, Floats]:
    """Dense core, wide halo: H. C. Plummer, Mon. Not. R. Astron. Soc. 71 (1911) 460."""
    random = np.random.default_rng(4)
    radius = 1.0 / np.sqrt(random.uniform(size=n) ** (-2.0 / 3.0) - 1.0)
    return radius * _directions(random, n), np.ones(n)


def two_signs(n: int) -> tuple[Floats, Floats]:
    """A round Gaussian cloud of charges +1 and -1, as many of each."""
    place, charge = gaussian(n)
    charge[1::2] = -1.0
    return place, charge


CLOUDS: dict[str, Cloud] = {
    "gaussian": gaussian,
    "ball": ball,
    "cube": cube,
    "plummer": plummer,
    "two signs": two_signs,
}
