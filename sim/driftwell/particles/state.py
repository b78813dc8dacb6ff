"""The state of all particles, flat: one contiguous array for each quantity, SI units inside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

LARGEST_COUNT = 10_000_000
"""Most simulated charges one cloud may have: about a gigabyte of state."""


@dataclass(slots=True)
class Particles:
    """Simulated charges that are alive, in the order of their ids.

    position : (3, n) float64, m
    velocity : (3, n) float64, proper velocity gamma v, m/s
    charge : (n,) float64, C, of one real particle
    mass : (n,) float64, kg, of one real particle
    weight : (n,) float64, real particles each simulated one stands for
    id : (n,) int64, stable, counted from 0 in the order of the scenario's clouds
    species, cloud : (n,) int64, index in the scenario's species and clouds
    birth_time : (n,) float64, s
    """

    position: Floats
    velocity: Floats
    charge: Floats
    mass: Floats
    weight: Floats
    id: Ints
    species: Ints
    cloud: Ints
    birth_time: Floats

    def __len__(self) -> int:
        return int(self.id.size)

    def kept(self, alive: NDArray[np.bool_]) -> Particles:
        """The particles where `alive` is true, in the same order, in fresh contiguous arrays."""
        return Particles(
            np.ascontiguousarray(self.position[:, alive]),
            np.ascontiguousarray(self.velocity[:, alive]),
            self.charge[alive],
            self.mass[alive],
            self.weight[alive],
            self.id[alive],
            self.species[alive],
            self.cloud[alive],
            self.birth_time[alive],
        )


def no_particles() -> Particles:
    """A set of none."""
    none, number = np.zeros(0), np.zeros(0, np.int64)
    return Particles(
        np.zeros((3, 0)), np.zeros((3, 0)), none, none, none, number, number, number, none
    )


def joined(parts: Sequence[Particles]) -> Particles:
    """Several sets of particles as one; ids are kept as they are."""
    return Particles(
        np.ascontiguousarray(np.concatenate([part.position for part in parts], axis=1)),
        np.ascontiguousarray(np.concatenate([part.velocity for part in parts], axis=1)),
        *(
            np.concatenate([getattr(part, name) for part in parts])
            for name in ("charge", "mass", "weight", "id", "species", "cloud", "birth_time")
        ),
    )
