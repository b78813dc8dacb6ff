"""Streams of charges to be born, put together without a scenario file. All settings invented."""

from __future__ import annotations

from typing import Any

import numpy as np

from driftwell.particles.unborn import Unborn, free
from tests.moving import ions


def stream(
    count: int,
    until: float,
    *,
    first_id: int = 0,
    size: float = 1e-3,
    speed: float = 100.0,
    seed: int = 1,
    **kind: Any,
) -> Unborn:
    """Charges born at random times before `until`, s, Gaussian in place, m, and velocity, m/s."""
    random = np.random.default_rng(seed)
    place = random.normal(scale=size, size=(count, 3))
    born = ions(place, random.normal(scale=speed, size=(count, 3)), **kind)
    born.id += first_id
    born.birth_time[:] = np.sort(random.uniform(0.0, until, count))
    return free(born)
