"""Clouds that the promised accuracy of the tree is held against; lengths and charges about 1."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from tests.physics.clouds import CLOUDS as PLAIN_CLOUDS
from tests.physics.clouds import Cloud

Floats = NDArray[np.float64]


def _directions(random: np.random.Generator, n: int) -> Floats:
    towards = random.normal(size=(3, n))
    made: Floats = towards / np.linalg.norm(towards, axis=0)
    return made


def ball(n: int) -> tuple[Floats, Floats]:
    """Even in a ball."""
    random = np.random.default_rng(n)
    return _directions(random, n) * random.uniform(size=n) ** (1.0 / 3.0), np.ones(n)


def shell(n: int) -> tuple[Floats, Floats]:
    """Hollow, a hundredth of its radius thick."""
    random = np.random.default_rng(n)
    return _directions(random, n) * (1.0 + 0.01 * random.normal(size=n)), np.ones(n)


def clustered(n: int) -> tuple[Floats, Floats]:
    """Thirty clusters of sizes 1e-4 to 1e-1."""
    random = np.random.default_rng(n)
    middle, size = random.normal(size=(3, 30)), 10.0 ** random.uniform(-4.0, -1.0, 30)
    which = random.integers(0, 30, n)
    place: Floats = middle[:, which] + size[which] * random.normal(size=(3, n))
    return place, np.ones(n)


def even_signs(n: int) -> tuple[Floats, Floats]:
    """Dense in the middle, as many positive as negative."""
    random = np.random.default_rng(n)
    return random.normal(size=(3, n)), np.where(random.uniform(size=n) < 0.5, 1.0, -1.0)


def salt(n: int) -> tuple[Floats, Floats]:
    """A cubic lattice of signs in turn, each a little off its place: almost all cancels."""
    side = int(np.ceil(n ** (1.0 / 3.0)))
    at = np.array(np.unravel_index(np.arange(n), (side, side, side)), dtype=np.float64)
    charge = 1.0 - 2.0 * (at.sum(axis=0) % 2.0)
    return at + np.random.default_rng(n).normal(scale=0.05, size=(3, n)), charge


def unequal(n: int) -> tuple[Floats, Floats]:
    """One in ten weighs a thousand times as much as the others."""
    random = np.random.default_rng(n)
    return random.normal(size=(3, n)), np.where(random.uniform(size=n) < 0.1, 1000.0, 1.0)


def probed(n: int) -> tuple[Floats, Floats]:
    """Two in five have no charge, and feel the others."""
    random = np.random.default_rng(n)
    return random.normal(size=(3, n)), np.where(random.uniform(size=n) < 0.4, 0.0, 1.0)


CLOUDS: dict[str, Cloud] = {
    **{name: PLAIN_CLOUDS[name] for name in ("gaussian", "needle", "plummer")},
    "ball": ball,
    "shell": shell,
    "clustered": clustered,
    "even signs": even_signs,
    "salt": salt,
    "unequal": unequal,
    "probed": probed,
}
