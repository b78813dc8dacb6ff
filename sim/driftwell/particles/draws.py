"""Random numbers of one cloud.

Every stream is keyed by (seed, cloud's name, purpose), so that another cloud, another order of the
clouds, or another use of random numbers in the same cloud changes none of them. Numbers are drawn
row by row, one row for each charge: with a larger count the first charges stay where they are.

References
----------
J. K. Salmon et al., Proc. SC11 (2011), doi:10.1145/2063384.2063405 (Philox).
I. M. Sobol', USSR Comput. Math. Math. Phys. 7 (1967) 86; J. Matousek, J. Complexity 14 (1998) 527
(scrambling).
"""

from __future__ import annotations

import hashlib
from dataclasses import dataclass
from typing import Literal

import numpy as np
from numpy.typing import NDArray

Placing = Literal["random", "even"]


@dataclass(frozen=True, slots=True)
class Draws:
    """The random numbers of one cloud in a run of this seed."""

    seed: int
    cloud: str

    def stream(self, purpose: str) -> np.random.Generator:
        """A fresh stream for `purpose`; the same numbers each time it is asked for."""
        return np.random.Generator(np.random.Philox(key=self._key(purpose)))

    def unit_points(
        self, purpose: str, count: int, dimensions: int, placing: Placing = "random"
    ) -> NDArray[np.float64]:
        """Points in the open unit cube, (dimensions, count).

        "random" points are independent. "even" ones follow a scrambled low-discrepancy sequence:
        each is uniform by itself, all together leave smaller gaps and smaller heaps.
        """
        if placing == "random":
            points = self.stream(purpose).random((count, dimensions))
            # a draw of exactly 0 would put a Gaussian coordinate infinitely far away
            return np.maximum(points, 2.0**-54).T
        from scipy.stats import qmc

        sequence = qmc.Sobol(dimensions, scramble=True, rng=self._key(purpose))
        points = sequence.random_base2(max(count - 1, 0).bit_length())[:count]
        return np.asarray(points + 0.5 / sequence.maxn).T  # the middle of each cell, never 0

    def _key(self, purpose: str) -> int:
        """128 bits of the digest of everything the stream depends on."""
        digest = hashlib.sha256(f"{self.seed}\0{self.cloud}\0{purpose}".encode()).digest()
        return int.from_bytes(digest[:16], "little")
