"""All charges that sources will bear in a run, drawn before it begins."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.particles.state import Particles, joined

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Unborn:
    """Charges to be born, in the order of their ids; those of one source in the order of time.

    particles : place, proper velocity and time at birth
    normal : (3, n), outward unit vector of the surface left; 0 where it is none
    demand : (n,) m s/V, eps0 times the area that emits over the current then, where the source is
        limited by space charge; 0 elsewhere
    chance : (n,) in [0, 1), what decides whether a limited one is launched
    """

    particles: Particles
    normal: Floats
    demand: Floats
    chance: Floats

    def __len__(self) -> int:
        return len(self.particles)


def free(particles: Particles) -> Unborn:
    """Charges born whatever the field is."""
    n = len(particles)
    return Unborn(particles, np.zeros((3, n)), np.zeros(n), np.zeros(n))


def all_unborn(parts: Sequence[Unborn]) -> Unborn:
    """Those of several sources as one."""
    return Unborn(
        joined([part.particles for part in parts]),
        np.concatenate([part.normal for part in parts], axis=1),
        np.concatenate([part.demand for part in parts]),
        np.concatenate([part.chance for part in parts]),
    )
