"""Where strokes meet: crossings, touches, and ends of one on another."""

from __future__ import annotations

import math
from collections.abc import Iterator

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.strokes import Strokes

Floats = NDArray[np.float64]


def _boxes(strokes: Strokes, tolerance: float) -> tuple[Floats, Floats]:
    """Corners (n, 2) of boxes that hold the strokes, which turn by a right angle at most."""
    ends = np.stack([strokes.start, strokes.at(0.5 * strokes.length), strokes.end])
    rise = np.abs(strokes.curvature) * strokes.length**2 / 8.0 + tolerance
    low = np.stack([ends.real.min(axis=0) - rise, ends.imag.min(axis=0) - rise], axis=1)
    high = np.stack([ends.real.max(axis=0) + rise, ends.imag.max(axis=0) + rise], axis=1)
    return low, high


def neighbours(strokes: Strokes, tolerance: float) -> Iterator[tuple[int, int]]:
    """Pairs i < j whose boxes touch."""
    low, high = _boxes(strokes, tolerance)
    for i in range(len(strokes) - 1):
        apart = (low[i + 1 :] > high[i]) | (high[i + 1 :] < low[i])
        for j in np.flatnonzero(~apart.any(axis=1)):
            yield i, i + 1 + int(j)


def _circles(strokes: Strokes, i: int, j: int) -> list[complex]:
    """Points common to the whole lines or circles of two strokes."""
    if strokes.curvature[i] == 0.0:
        i, j = j, i
    z, a = complex(strokes.start[i]), strokes.direction[i]
    w, b = complex(strokes.start[j]), strokes.direction[j]
    along_j = complex(math.cos(b), math.sin(b))
    if strokes.curvature[i] == 0.0:
        along_i = complex(math.cos(a), math.sin(a))
        cross = (along_i.conjugate() * along_j).imag
        if abs(cross) < 1e-12:
            return []
        return [z + along_i * (((w - z).conjugate() * along_j).imag / cross)]
    k = strokes.curvature[i]
    centre = z + 1j * complex(math.cos(a), math.sin(a)) / k
    radius = 1.0 / abs(k)
    if strokes.curvature[j] == 0.0:
        nearest = w + along_j * ((centre - w) * along_j.conjugate()).real
        square = radius**2 - abs(nearest - centre) ** 2
        return _both(nearest, along_j, square, radius**2)
    other = w + 1j * along_j / strokes.curvature[j]
    other_radius = 1.0 / abs(strokes.curvature[j])
    apart = abs(other - centre)
    if apart < 1e-12 * (radius + other_radius):
        return []
    towards = (other - centre) / apart
    middle = 0.5 * (apart + (radius - other_radius) * (radius + other_radius) / apart)
    square = (radius - middle) * (radius + middle)
    return _both(centre + towards * middle, 1j * towards, square, radius**2)


def _both(middle: complex, along: complex, square: float, scale: float) -> list[complex]:
    if square < -1e-12 * scale:
        return []
    half = math.sqrt(max(square, 0.0))
    return [middle - half * along, middle + half * along]


def meetings(strokes: Strokes, i: int, j: int, tolerance: float) -> list[tuple[float, float]]:
    """Positions along strokes i and j of all points they share, to within `tolerance`, m.

    Of strokes that lie on each other: the ends of each that are on the other.
    """
    points = [
        *_circles(strokes, i, j),
        *(complex(strokes.start[k]) for k in (i, j)),
        *(complex(strokes.end[k]) for k in (i, j)),
    ]
    pair = strokes.taken(np.array([i, j]))
    distance, position = pair.nearest(np.array(points))
    found: list[tuple[float, float]] = []
    for near, (s, t) in zip(distance, position, strict=True):
        if near.max() <= tolerance and not any(
            abs(s - u) <= 4.0 * tolerance and abs(t - v) <= 4.0 * tolerance for u, v in found
        ):
            found.append((float(s), float(t)))
    return found
