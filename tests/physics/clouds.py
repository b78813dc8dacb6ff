"""Clouds that sums over pairs are tried on; lengths of about 1, charges of about 1."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np

from tests.pair_sums import Floats

Cloud = Callable[[int], tuple[Floats, Floats]]
"""Number of charges -> places (3, n) and charges (n,)."""


def gaussian(n: int) -> tuple[Floats, Floats]:
    """Equal charges, dense in the middle."""
    return np.random.default_rng(n).normal(size=(3, n)), np.ones(n)


def cube(n: int) -> tuple[Floats, Floats]:
    """Equal charges, even in a cube."""
    return np.random.default_rng(n).uniform(-1.0, 1.0, (3, n)), np.ones(n)


def needle(n: int) -> tuple[Floats, Floats]:
    """A thousand times longer than wide."""
    place = np.random.default_rng(n).normal(size=(3, n))
    place[:2] *= 1e-3
    return place, np.ones(n)


def plummer(n: int) -> tuple[Floats, Floats]:
    """Dense core, wide halo: H. C. Plummer, Mon. Not. R. Astron. Soc. 71 (1911) 460."""
    random = np.random.default_rng(n)
    direction = random.normal(size=(3, n))
    radius = 1.0 / np.sqrt(random.uniform(size=n) ** (-2.0 / 3.0) - 1.0)
    return radius * direction / np.linalg.norm(direction, axis=0), np.ones(n)


def two_signs(n: int) -> tuple[Floats, Floats]:
    """Charges of both signs and all sizes, dense in the middle."""
    random = np.random.default_rng(n)
    return random.normal(size=(3, n)), random.uniform(-1.5, 1.5, n)


CLOUDS: dict[str, Cloud] = {
    "gaussian": gaussian,
    "cube": cube,
    "needle": needle,
    "plummer": plummer,
    "two signs": two_signs,
}
