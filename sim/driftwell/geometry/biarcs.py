"""Smooth curves as chains of arcs that continue each other's direction.

Between two points z1, z2 with unit tangents t1, t2 go two arcs with one tangent where they meet.
With v = z2 - z1, t = t1 + t2 and equal lengths d from the points to the corners of the control
polygon,

    2 (1 - t1.t2) d^2 + 2 v.t d - v.v = 0,    they meet at (z1 + z2 + d (t1 - t2)) / 2       (1)

A curve is cut in halves of its parameter until the arcs are as near to it as asked for. The
distance falls with the third power of the interval's length.

References
----------
K. M. Bolton, Computer-Aided Design 7 (1975) 89; D. S. Meek and D. J. Walton, J. Comput. Appl. Math.
59 (1995) 221 (order of the distance; both from memory).
"""

from __future__ import annotations

import cmath
import math
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.outline import arc, line
from driftwell.geometry.outline import outline as outline_of
from driftwell.geometry.strokes import joined, strokes

Floats = NDArray[np.float64]
Curve = Callable[[float], tuple[complex, complex]]
"""Point x + i y, m, and the direction of the curve, of any length, at a parameter."""

TOLERANCE = 1e-8
"""Distance from the true curve that is allowed, in parts of the curve's size."""
_DEEPEST = 14
_STRAIGHT = 1e-10
_CHECKED = (0.11, 0.24, 0.38, 0.5, 0.62, 0.76, 0.89)


def _dot(a: complex, b: complex) -> float:
    return a.real * b.real + a.imag * b.imag


def _bow(start: complex, tangent: complex, end: complex) -> Floats:
    """The arc that leaves `start` in a direction and ends at `end`, (7,)."""
    chord = end - start
    first, last = (start.real, start.imag), (end.real, end.imag)
    turn = 2.0 * cmath.phase(chord / tangent)
    if abs(turn) < _STRAIGHT:
        return line(first, last)
    centre = start + 1j * tangent * abs(chord) / (2.0 * math.sin(0.5 * turn))
    return arc(first, last, (centre.real, centre.imag), turn)


def biarc(start: complex, leaving: complex, end: complex, arriving: complex) -> list[Floats]:
    """Two arcs (7,) from `start` to `end` with unit directions at both ends: equation (1)."""
    v, t = end - start, leaving + arriving
    bend = 2.0 * (1.0 - _dot(leaving, arriving))
    along, square = 2.0 * _dot(v, t), _dot(v, v)
    # the positive root, in the form that holds for bend = 0
    d = 2.0 * square / (along + math.sqrt(along * along + 4.0 * bend * square))
    middle = 0.5 * (start + end + d * (leaving - arriving))
    first = _bow(start, leaving, middle)
    second = _bow(-end, arriving, -middle)
    # walked the other way, which turns it round
    x0, y0, x1, y1, xc, yc, sweep = (-second).tolist()
    return [first, np.array([x1, y1, x0, y0, xc, yc, sweep])]


def biarc_chain(
    curve: Curve, begin: float, end: float, tolerance: float = TOLERANCE
) -> list[Floats]:
    """Pieces (7,) of an outline, from parameter `begin` to `end` of a smooth curve.

    tolerance : largest distance between the two, in parts of the largest coordinate
    """
    nodes = [curve(begin + (end - begin) * share) for share in (0.0, 0.25, 0.5, 0.75, 1.0)]
    allowed = tolerance * max(abs(point) for point, _ in nodes)

    def between(first: float, last: float, depth: int) -> list[Floats]:
        (z1, t1), (z2, t2) = curve(first), curve(last)
        pieces = biarc(z1, t1 / abs(t1), z2, t2 / abs(t2))
        points = np.array([curve(first + (last - first) * share)[0] for share in _CHECKED])
        found = joined([strokes(outline_of([[piece]], solid=False)) for piece in pieces])
        if depth == _DEEPEST or found.nearest(points)[0].min(axis=1).max() <= allowed:
            return pieces
        middle = 0.5 * (first + last)
        return between(first, middle, depth + 1) + between(middle, last, depth + 1)

    quarter = 0.25 * (end - begin)
    return [
        piece
        for k in range(4)
        for piece in between(begin + k * quarter, begin + (k + 1) * quarter, 0)
    ]
