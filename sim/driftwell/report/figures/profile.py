"""Densities from counting: real particles in shells, tubes or slices over what these measure.

    n_k = sum of w in bin k / V_k,   error = sqrt(sum of w^2) / V_k                              (1)
    shells  V = 4 pi/3 (b^3 - a^3), m^3;  tubes  pi (b^2 - a^2), m^2;  slices  b - a, m          (2)

so that the sum over n_k V_k is the number of particles. The error is that of counting w at a time,
for charges that were drawn independently of one another (common practice, no source). Inner shells
measure little: they are joined until each bin holds LEAST charges.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

LEAST = 16
"""Charges in a bin, at the least, save in the last."""
FEWEST, MOST = 8, 60
MEASURES: dict[str, Callable[[Floats], Floats]] = {
    "shells": lambda edge: 4.0 * math.pi / 3.0 * edge**3,
    "tubes": lambda edge: math.pi * edge**2,
    "slices": lambda edge: edge,
}
"""What lies within an edge, eq. 2."""
DIMENSIONS = {"shells": 3, "tubes": 2, "slices": 1}


@dataclass(frozen=True, slots=True)
class Profile:
    """Density (k,) in bins with edges (k + 1,), m, and its error (k,); 1/m^3, 1/m^2 or 1/m."""

    edges: Floats
    density: Floats
    error: Floats


def radii(position: Floats, weight: Floats, axis: int | None) -> Floats:
    """Distances (n,), m, from the centre of charges (n, 3), or from the line along an axis."""
    apart = position - np.average(position, axis=0, weights=weight)
    if axis is not None:
        apart[:, axis] = 0.0
    return np.asarray(np.sqrt(np.sum(apart**2, axis=1)))


def radial_profile(
    radius: Floats, weight: Floats, kind: str, limits: tuple[float, float] | None = None
) -> Profile:
    """The density in shells or tubes."""
    low, high = limits or (0.0, float(radius.max()))
    edges = np.linspace(low, high, bin_count(radius.size) + 1)
    counts = np.histogram(radius, edges)[0]
    return counted(radius, weight, joined(edges, counts), kind)


def axial_profile(
    place: Floats, weight: Floats, limits: tuple[float, float] | None = None
) -> Profile:
    """The number per length, in slices."""
    low, high = limits or (float(place.min()), float(place.max()))
    return counted(place, weight, np.linspace(low, high, bin_count(place.size) + 1), "slices")


def counted(place: Floats, weight: Floats, edges: Floats, kind: str) -> Profile:
    """Eq. 1."""
    measure = np.diff(MEASURES[kind](edges))
    total = np.histogram(place, edges, weights=weight)[0]
    square = np.histogram(place, edges, weights=weight**2)[0]
    return Profile(edges, total / measure, np.sqrt(square) / measure)


def bin_count(charges: int) -> int:
    """How many bins suit so many charges: twice the cube root, as for smooth densities."""
    return min(max(round(2.0 * math.cbrt(charges)), FEWEST), MOST)


def joined(edges: Floats, counts: NDArray[np.int64]) -> Floats:
    """The edges without those between bins that hold too few charges, joined from inside."""
    kept, held = [edges[0]], 0
    for edge, count in zip(edges[1:], counts, strict=True):
        held += int(count)
        if held >= LEAST or edge == edges[-1]:
            kept.append(edge)
            held = 0
    return np.array(kept)
