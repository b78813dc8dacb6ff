"""Highest density of a cloud, in real particles per cubic metre.

Where the density peaks is found in one half of the charges, how large it is there is counted in
the other half, then the other way round, and the two are averaged: counting where one has just
seen many would count chance as density. Lengths are measured in
the cloud's own principal sizes, so that a long thin cloud is treated as a round one.

    place    the charge whose k-th neighbour is nearest, moved to the centre of its neighbours
             until it rests; k grows with the number of charges                              (1)
    density  n(r) = n0 + n2 r^2 fitted to number and mean square radius in a ball of radius R:
             n0 = (C V7 - S V5) / (V3 V7 - V5^2),  V_p = 4 pi R^p / p                        (2)

C is the count within R and S the sum of r^2. The curvature of the peak, which lowers a plain count
in a ball, is taken out by eq. 2. Tried on Gaussian clouds it is low by 5 % from 300 to 1000
charges and by 1 % from 10000. Charges ordered by their repulsion scatter less than the error says;
in a crystal the value is that smoothed over many sites.

References
----------
D. O. Loftsgaarden, C. P. Quesenberry, Ann. Math. Stat. 36 (1965) 1049 (density from the distance
to the k-th neighbour). Eq. 2 is a local polynomial fit, own derivation. From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import charges_at, number_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import InstantQuestion, instant_in_words
from driftwell.answers.sampling import Bools, group_of, jackknife_error
from driftwell.errors import AnswerError
from driftwell.forms import key

Floats = NDArray[np.float64]

_LEAST = 50
_COUNTED, _AVERAGED = 1.2, 3.0
_POWER = 8.0 / 11.0
_CANDIDATES = 500
_MOVES = 10


class PeakDensity(InstantQuestion):
    """Density at the densest place of a cloud."""

    unit: ClassVar[str] = "1/m^3"
    ask: Literal["peak-density"] = key("highest density, real particles per volume")

    def answer(self, evidence: Evidence) -> Answer:
        charges = charges_at(evidence, self.of, self.time_in(evidence), _LEAST)
        half = group_of(len(charges)) % 2  # whole groups of the jackknife in either half
        share, volume = _shares(charges.position, half)
        scale = len(charges) * charges.cloud.weight / volume

        def density(keep: Bools) -> float:
            means = [share[keep & (half == side)].mean() for side in (0, 1)]
            return scale * 0.5 * float(means[0] + means[1])

        value = density(np.ones(len(charges), dtype=np.bool_))
        error = jackknife_error(density, len(charges))
        within = max(1, round(float(np.count_nonzero(share)) / 2))
        note = (
            f"{number_in_words(len(charges), charges.cloud)}; at the densest place, from the "
            f"{within} charges nearest to it in each half of the cloud"
        )
        return self.answered(value, error, note)

    def words(self) -> str:
        return f'peak density of cloud "{self.of}" {instant_in_words(self.at)}'


def _shares(position: Floats, half: NDArray[np.int64]) -> tuple[Floats, float]:
    """What each charge adds to n0 over the number of charges, (n,), and the unit of volume, m^3."""
    apart = position - position.mean(axis=1, keepdims=True)
    sizes, axes = np.linalg.eigh(np.einsum("in,jn->ij", apart, apart) / apart.shape[1])
    if sizes[0] <= 1e-20 * sizes[2]:
        raise AnswerError("the charges lie in a plane, on a line or at a point: no volume density")
    scaled = np.einsum("ij,in->nj", axes, apart) / np.sqrt(sizes)
    share = np.zeros(len(scaled))
    for side in (0, 1):
        place, radius = _densest(scaled[half == side])
        square = np.sum((scaled[half != side] - place) ** 2, axis=1)
        v3, v5, v7 = (4.0 * math.pi * radius**power / power for power in (3, 5, 7))
        inside = square < radius**2
        share[half != side] = np.where(inside, (v7 - v5 * square) / (v3 * v7 - v5**2), 0.0)
    return share, float(np.sqrt(np.prod(sizes)))


def _densest(points: Floats) -> tuple[Floats, float]:
    """The densest place among points (n, 3), eq. 1, and the radius to count within."""
    from scipy.spatial import cKDTree

    tree = cKDTree(points)
    count = len(points)
    counted = min(round(_COUNTED * count**_POWER), count)
    averaged = min(round(_AVERAGED * count**_POWER), count)
    tried = points[:: max(1, count // _CANDIDATES)]
    place = tried[np.asarray(tree.query(tried, [counted])[0])[:, 0].argmin()]
    for _ in range(_MOVES):
        place = points[tree.query(place, averaged)[1]].mean(axis=0)
    return place, float(np.asarray(tree.query(place, [counted])[0])[0])
