"""Outlines cut into short straight edges, graded towards what the charge crowds at.

Next to an edge of opening angle b, measured outside, the density of charge goes as the distance to
the power pi / b - 1: -1/3 at the edges of a box, -1/2 at the rim of a sheet. Stations at a distance
that grows with the power `grade` of their number keep up with it.

The middle of a chord lies within its arc. Where `fair` is asked for, the stations are moved outside
by so much that the chords lie on the arc on average: the error of the charge falls from the second
to the third power of the chord.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 2.11 (densities at edges).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.outline import Outline

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_SMOOTH = math.radians(12.0)
"""Turns below this between pieces are no edges."""
_TOUCHING = 1e-9
"""Ends closer than this part of the outline's extent are one point."""


@dataclass(frozen=True, slots=True)
class Chain:
    """The stations of one loop, in order.

    points : (n, 2) float64, m; of a closed loop the first is not repeated
    piece : (edges,) int64, the outline's piece each edge lies on; edge k begins at point k
    closed : whether the last point is joined to the first
    inside_left : whether the solid lies to the left of the direction; None of a thin sheet
    """

    points: Floats
    piece: Ints
    closed: bool
    inside_left: bool | None


@dataclass(frozen=True, slots=True)
class Fineness:
    """How finely surfaces are cut.

    size : mean edge along a piece, m; between graded ends the longest has `grade` times that
    turn : largest angle between neighbouring normals of a curved surface, rad
    grade : power of the spacing towards edges; 1 for even spacing
    fair : whether facets lie on curved surfaces on average, else with their corners
    """

    size: float
    turn: float = math.pi / 8.0
    grade: float = 3.0
    fair: bool = False


def chains(outline: Outline, how: Fineness) -> list[Chain]:
    """All loops of an outline, cut; each piece into an even number of edges."""
    inside_left = _inside_left(outline) if outline.solid else None
    found = []
    for number, (low, high) in enumerate(pairwise(outline.loops)):
        pieces = outline.pieces[low:high]
        left = None if inside_left is None else inside_left[number]
        found.append(_chain(pieces, int(low), outline, left, how))
    return found


def extent_of(outline: Outline) -> float:
    """A length no smaller than the outline's largest coordinate difference of piece ends."""
    ends = outline.pieces[:, :4].reshape(-1, 2)
    reach = np.max(np.ptp(ends, axis=0))
    radii = [piece_radius(piece) for piece in outline.pieces if piece[6] != 0.0]
    return float(max([reach, *radii]))


def piece_radius(piece: Floats) -> float:
    """Radius of an arc, m."""
    return math.hypot(piece[0] - piece[4], piece[1] - piece[5])


def piece_length(piece: Floats) -> float:
    """Length of a line or an arc, m."""
    if piece[6] != 0.0:
        return abs(float(piece[6])) * piece_radius(piece)
    return math.hypot(piece[2] - piece[0], piece[3] - piece[1])


def places(piece: Floats, parts: Floats) -> Floats:
    """Points (n, 2) at parts of the length, 0 to 1, of one piece."""
    start, end = piece[0:2], piece[2:4]
    if piece[6] == 0.0:
        found = start + parts[:, None] * (end - start)
    else:
        centre, radius = piece[4:6], piece_radius(piece)
        begin = math.atan2(start[1] - centre[1], start[0] - centre[0])
        angle = begin + parts * piece[6]
        found = centre + radius * np.stack([np.cos(angle), np.sin(angle)], axis=1)
    found[parts == 0.0], found[parts == 1.0] = start, end
    return np.asarray(found)


def tangents(piece: Floats) -> tuple[Floats, Floats]:
    """Directions of length 1 at the start and at the end of a piece."""
    if piece[6] == 0.0:
        along = (piece[2:4] - piece[0:2]) / piece_length(piece)
        return along, along
    sign, centre, radius = math.copysign(1.0, piece[6]), piece[4:6], piece_radius(piece)
    first, last = (piece[0:2] - centre) / radius, (piece[2:4] - centre) / radius
    return (
        sign * np.array([-first[1], first[0]]),
        sign * np.array([-last[1], last[0]]),
    )


def spaced(count: int, grade: float, at_start: bool, at_end: bool) -> Floats:
    """Stations 0 to 1, `count` + 1 of them, crowded at the ends that are named."""
    even = np.linspace(0.0, 1.0, count + 1)
    if at_start and at_end:
        half = 0.5 * (2.0 * even[: count // 2 + 1]) ** grade
        return np.concatenate([half, 1.0 - half[::-1][1:] if count % 2 == 0 else 1.0 - half[::-1]])
    if at_start:
        return np.asarray(even**grade)
    if at_end:
        return np.asarray(1.0 - (even**grade)[::-1])
    return even


def even_count(length: float, how: Fineness, sweep: float = 0.0) -> int:
    """An even number of edges that a length, and the turn of its direction, are cut into."""
    needed = max(length / how.size, abs(sweep) / how.turn, 2.0)
    return 2 * math.ceil(0.5 * needed - 1e-9)


def _chain(
    pieces: Floats, first: int, outline: Outline, inside_left: bool | None, how: Fineness
) -> Chain:
    """One loop; `first` is the number of its first piece."""
    near = _TOUCHING * extent_of(outline)
    closed = math.dist(pieces[0, 0:2], pieces[-1, 2:4]) <= near
    count = len(pieces)
    sharp = [_is_sharp(pieces[k - 1], pieces[k], inside_left) for k in range(count)]
    if not closed:
        sharp[0] = not outline.solid  # a solid one ends on the axis
    ends = [*sharp[1:], sharp[0] if closed or not outline.solid else False]
    points, owner = [], []
    for k, piece in enumerate(pieces):
        number = even_count(piece_length(piece), how, piece[6])
        parts = spaced(number, how.grade, sharp[k], ends[k])
        found = places(piece, parts)
        if how.fair and piece[6] != 0.0:
            before = _continues(pieces[k - 1], piece) if closed or k > 0 else _on_axis(piece, 0)
            after = pieces[(k + 1) % count]
            behind = _continues(after, piece) if closed or k + 1 < count else _on_axis(piece, 1)
            _move_out(found, piece, parts, before, behind)
        points.append(found[:-1])
        owner.append(np.full(number, first + k, dtype=np.int64))
        last = found[-1:]
    if not closed:
        points.append(last)
    return Chain(np.concatenate(points), np.concatenate(owner), closed, inside_left)


def _is_sharp(before: Floats, after: Floats, inside_left: bool | None) -> bool:
    """Whether the charge crowds at the joint; at edges that open outwards it fades instead."""
    u, v = tangents(before)[1], tangents(after)[0]
    turn = math.atan2(u[0] * v[1] - u[1] * v[0], float(np.dot(u, v)))
    if abs(turn) < _SMOOTH:
        return False
    return inside_left is None or (turn > 0.0) == inside_left


def _continues(other: Floats, piece: Floats) -> bool:
    """Whether another piece is an arc of the same circle."""
    if other[6] == 0.0:
        return False
    apart = math.dist(other[4:6], piece[4:6]) + abs(piece_radius(other) - piece_radius(piece))
    return bool(apart < _TOUCHING * piece_radius(piece))


def _on_axis(piece: Floats, end: int) -> bool:
    """Whether an arc about a point of the axis ends on the axis."""
    near = _TOUCHING * piece_radius(piece)
    return bool(max(abs(piece[2 * end]), abs(piece[4])) < near)


def _move_out(points: Floats, piece: Floats, parts: Floats, first: bool, last: bool) -> None:
    """Move an arc's stations, ends only where told, until its chords lie on it on average."""
    half = 0.5 * abs(piece[6]) * np.diff(parts)
    inward = np.sum(np.diff(parts) * (2.0 / 3.0) * (1.0 - np.cos(half)))
    weight = np.zeros(len(parts))
    weight[:-1] += 0.5 * np.diff(parts)
    weight[1:] += 0.5 * np.diff(parts)
    moved = np.ones(len(parts), dtype=bool)
    moved[0], moved[-1] = first, last
    outward = inward / (np.sum(weight[moved]) - inward)
    points[moved] += outward * (points[moved] - piece[4:6])


def _inside_left(outline: Outline) -> list[bool]:
    """For each loop, whether the solid lies to the left of its direction."""
    fine = Fineness(0.1 * extent_of(outline), math.pi / 32.0, 1.0)
    starts, ends, loops = [], [], []
    for low, high in pairwise(outline.loops):
        stretch = [
            places(p, spaced(even_count(piece_length(p), fine, p[6]), 1.0, False, False))
            for p in outline.pieces[low:high]
        ]
        loops.append(np.concatenate([np.stack([s[:-1], s[1:]], axis=1) for s in stretch]))
        starts.append(loops[-1][:, 0])
        ends.append(loops[-1][:, 1])
    begin, end = np.concatenate(starts), np.concatenate(ends)
    found = []
    for edges in loops:
        longest = edges[np.argmax(np.linalg.norm(edges[:, 1] - edges[:, 0], axis=1))]
        along = longest[1] - longest[0]
        beside = longest.mean(axis=0) + 1e-6 * np.array([-along[1], along[0]])
        found.append(bool(within(beside[None], begin, end)[0]))
    return found


def within(points: Floats, starts: Floats, ends: Floats) -> NDArray[np.bool_]:
    """Whether points (n, 2) lie in the area that edges bound: right of them is an odd number."""
    inside = np.zeros(len(points), dtype=bool)
    for low in range(0, len(points), 4096):
        x, y = points[low : low + 4096, 0, None], points[low : low + 4096, 1, None]
        crosses = (starts[:, 1] > y) != (ends[:, 1] > y)
        rise = np.where(crosses, ends[:, 1] - starts[:, 1], 1.0)
        at = starts[:, 0] + (y - starts[:, 1]) / rise * (ends[:, 0] - starts[:, 0])
        inside[low : low + 4096] = np.sum(crosses & (at > x), axis=1) % 2 == 1
    return inside
