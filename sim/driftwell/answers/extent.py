"""How far charges lie from their middle: root mean square, or the distance that holds most.

    rms    sqrt(mean of r^2),  r the distance from the charges' own mean                      (1)
    edge   the distance within which 90 % of the charges lie                                  (2)

r is taken along one axis, or across a plane. A uniform disc of radius R has 0.5 R along an axis
and 0.7071 R across by eq. 1, 0.9487 R across by eq. 2.

The error of eq. 1 is a jackknife, that of eq. 2 the one of a quantile.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 5.3.4 (rms and edge of a beam;
from memory). 90 %: common practice, no source.
"""

from __future__ import annotations

import math
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.sampling import jackknife_error, quantile_error

Floats = NDArray[np.float64]

Measure = Literal["rms", "edge"]
HELD = 0.9
"""Part of the charges within the edge."""


def size_in_words(measure: Measure, axis: str) -> str:
    """``rms radius``, ``size along x that holds 90 %``; `axis` may be "radius"."""
    what = "radius" if axis == "radius" else f"size along {axis}"
    return f"rms {what}" if measure == "rms" else f"{what} that holds 90 %"


def distances(places: Floats) -> Floats:
    """Distances (n,) of places (axes, n) from their mean."""
    apart = places - places.mean(axis=1, keepdims=True)
    return np.asarray(np.sqrt(np.sum(apart**2, axis=0)))


def extent(places: Floats, measure: Measure) -> float:
    """Size of charges at places (axes, n), m."""
    distance = distances(places)
    if measure == "rms":
        return math.sqrt(float(np.mean(distance**2)))
    return float(np.quantile(distance, HELD))


def extent_error(places: Floats, measure: Measure) -> float | None:
    """Sampling error of :func:`extent`, m."""
    if measure == "edge":
        return quantile_error(distances(places), HELD)
    return jackknife_error(lambda keep: extent(places[:, keep], "rms"), places.shape[1])
