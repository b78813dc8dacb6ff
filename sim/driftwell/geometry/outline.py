"""Outlines in a plane: loops of straight lines and circular arcs, which bound an area or are thin.

Lines and arcs are all there is, so that whoever asks for distances, crossings or surface charges
knows two kinds of pieces. Smooth curves of other kinds are made of short arcs that continue each
other's direction (biarcs.py).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

Floats = NDArray[np.float64]
Point2 = tuple[float, float]

COLUMNS = 7
"""Numbers of a piece: start (2), end (2), centre of the arc (2; 0 for a line), sweep."""


@dataclass(frozen=True, slots=True)
class Outline:
    """Pieces that follow each other in loops.

    pieces : (k, 7) float64: x0, y0, x1, y1, xc, yc, sweep; lengths in m, the sweep in rad, signed,
        counter-clockwise positive, from start to end about the centre; 0 for a straight line
    loops : (m + 1,) int64, where the pieces of each loop begin
    solid : whether the loops bound an area; else they are thin sheets, which both ends may leave

    An area is what a ray in the direction of +x leaves through an odd number of pieces. So it may
    have holes, and of a body of revolution, where x is the distance from the axis, the line on the
    axis is left out: an outline from axis to axis bounds an area.
    """

    pieces: Floats
    loops: NDArray[np.int64]
    solid: bool

    def joined(self, other: Outline) -> Outline:
        """Both outlines as one; what lies within both is outside, so a loop within is a hole."""
        if self.solid != other.solid:
            raise ValueError("an outline bounds an area or is thin, not both")
        return Outline(
            np.concatenate([self.pieces, other.pieces]),
            np.concatenate([self.loops, other.loops[1:] + len(self.pieces)]),
            self.solid,
        )

    def shifted(self, dx: float, dy: float) -> Outline:
        """The outline moved in its plane."""
        pieces = self.pieces.copy()
        arc = pieces[:, 6] != 0.0
        pieces[:, 0:4] += (dx, dy, dx, dy)
        pieces[arc, 4:6] += (dx, dy)
        return Outline(pieces, self.loops, self.solid)


def line(start: Point2, end: Point2) -> Floats:
    """A straight piece, (7,)."""
    return np.array([*start, *end, 0.0, 0.0, 0.0])


def arc(start: Point2, end: Point2, centre: Point2, sweep: float) -> Floats:
    """A circular piece, (7,); sweep in rad, counter-clockwise positive."""
    return np.array([*start, *end, *centre, sweep])


def arc_through(start: Point2, middle: Point2, end: Point2) -> Floats:
    """The circular piece through three points, (7,); a straight one where they lie on a line."""
    ax, ay = middle[0] - start[0], middle[1] - start[1]
    bx, by = end[0] - start[0], end[1] - start[1]
    cross = ax * by - ay * bx
    a2, b2 = ax * ax + ay * ay, bx * bx + by * by
    if abs(cross) <= 1e-12 * math.sqrt(a2 * b2):
        return line(start, end)
    centre = (
        start[0] + 0.5 * (by * a2 - ay * b2) / cross,
        start[1] + 0.5 * (ax * b2 - bx * a2) / cross,
    )
    first = math.atan2(start[1] - centre[1], start[0] - centre[0])
    last = math.atan2(end[1] - centre[1], end[0] - centre[0])
    turn = (last - first) % (2.0 * math.pi)
    # the three points turn to the left where the cross product of the chords is positive
    return arc(start, end, centre, turn if cross > 0.0 else turn - 2.0 * math.pi)


def outline(loops: Sequence[Sequence[ArrayLike]], solid: bool) -> Outline:
    """An outline of loops, each a sequence of pieces (7,)."""
    lengths = [len(loop) for loop in loops]
    pieces = [np.asarray(piece, dtype=np.float64) for loop in loops for piece in loop]
    return Outline(
        np.array(pieces).reshape(-1, COLUMNS),
        np.concatenate([[0], np.cumsum(lengths)]).astype(np.int64),
        solid,
    )


def rectangle(low: Point2, high: Point2) -> Outline:
    """The rectangle between two corners."""
    (x0, y0), (x1, y1) = low, high
    sides = [line((x0, y0), (x1, y0)), line((x1, y0), (x1, y1)), line((x1, y1), (x0, y1))]
    return outline([[*sides, line((x0, y1), (x0, y0))]], solid=True)


def circle(centre: Point2, radius: float) -> Outline:
    """A circle, as two half arcs."""
    x, y = centre
    right, left = (x + radius, y), (x - radius, y)
    return outline(
        [[arc(right, left, centre, math.pi), arc(left, right, centre, math.pi)]], solid=True
    )
