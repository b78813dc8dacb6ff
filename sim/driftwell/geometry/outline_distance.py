"""Distance from a point of the plane to an outline, and the side of it the point is on.

Of a line from a with unit direction m and length L: |m x (p - a)| where 0 <= m.(p - a) <= L, else
the distance to the nearer end. Of an arc of radius R about c: ||p - c| - R| where p lies in its
wedge, else the distance to the nearer end. Inside is where a ray in the direction of +x leaves
through an odd number of pieces. Arcs are cut where they turn back along x or y, so that a ray
meets each at most once and their ends tell which: heights are compared at ends alone, and a ray
through a common end counts once.

The side of a thin outline, +1 on the left of its direction, -1 on the right, is that of the nearest
piece; at a common end it is told by the sum of both normals, the plane's case of the
angle-weighted normals of J. A. Baerentzen and H. Aanaes, IEEE Trans. Visual. Comput. Graphics 11
(2005) 243 (from memory).
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.box_tree import FIRST, LAST, SKIP
from driftwell.geometry.outline import Outline
from driftwell.kernels import inner_kernel, outer_kernel

Floats = NDArray[np.float64]

COLUMNS = 15
"""Numbers of a packed piece: start (2), end (2), centre (2), radius or length, unit direction of
the line or to the middle of the arc (2), cosine of half the sweep, turn (-1, 1; 0 of a line),
left normals at start and end (4)."""
_TURN = 10
_QUARTER = 0.5 * math.pi
_SAME_ANGLE = 1e-9


def packed_pieces(outline: Outline) -> Floats:
    """The outline's pieces (k, 15), arcs cut into such that do not turn back."""
    rows: list[Floats] = []
    for first, last in zip(outline.loops[:-1], outline.loops[1:], strict=True):
        loop = [row for piece in outline.pieces[first:last] for row in _cut(piece)]
        rows += _joined(loop)
    return np.array(rows).reshape(-1, COLUMNS)


def piece_boxes(packed: Floats) -> tuple[Floats, Floats]:
    """Lowest and highest corners (k, 2): cut arcs lie between their ends."""
    return (
        np.minimum(packed[:, 0:2], packed[:, 2:4]),
        np.maximum(packed[:, 0:2], packed[:, 2:4]),
    )


def _cut(piece: Floats) -> list[Floats]:
    """A piece of an outline as packed ones, their normals those of their own ends."""
    x0, y0, x1, y1, xc, yc, sweep = (float(each) for each in piece)
    if sweep == 0.0:
        length = math.hypot(x1 - x0, y1 - y0)
        if length == 0.0:
            return []
        mx, my = (x1 - x0) / length, (y1 - y0) / length
        return [np.array([x0, y0, x1, y1, 0.0, 0.0, length, mx, my, 0.0, 0.0, -my, mx, -my, mx])]
    radius = math.hypot(x0 - xc, y0 - yc)
    begin = math.atan2(y0 - yc, x0 - xc)
    turn = math.copysign(1.0, sweep)
    low, high = sorted((begin, begin + sweep))
    between = [
        k
        for k in range(math.ceil(low / _QUARTER), math.floor(high / _QUARTER) + 1)
        if low + _SAME_ANGLE < k * _QUARTER < high - _SAME_ANGLE
    ]
    between.sort(reverse=sweep < 0.0)
    quarters = ((1.0, 0.0), (0.0, 1.0), (-1.0, 0.0), (0.0, -1.0))
    places = [(x0, y0)]
    places += [
        (xc + radius * quarters[k % 4][0], yc + radius * quarters[k % 4][1]) for k in between
    ]
    places.append((x1, y1))
    angles = [begin, *(k * _QUARTER for k in between), begin + sweep]
    made = []
    for k in range(len(angles) - 1):
        half = 0.5 * (angles[k + 1] - angles[k])
        middle = angles[k] + half
        normals = [
            -turn * each
            for angle in (angles[k], angles[k + 1])
            for each in (math.cos(angle), math.sin(angle))
        ]
        ends = [*places[k], *places[k + 1], xc, yc, radius]
        made.append(
            np.array([*ends, math.cos(middle), math.sin(middle), math.cos(half), turn, *normals])
        )
    return made


def _joined(loop: list[Floats]) -> list[Floats]:
    """The pieces of a loop, with the sum of both normals at each common end."""
    for k, piece in enumerate(loop):
        following = loop[(k + 1) % len(loop)]
        if following is not piece and np.array_equal(piece[2:4], following[0:2]):
            both = piece[13:15] + following[11:13]
            piece[13:15] = following[11:13] = both
    return loop


@outer_kernel
def to_pieces(
    node: np.ndarray, link: np.ndarray, piece: np.ndarray, root: int, x: float, y: float
) -> tuple[float, float]:
    """Distance to the nearest piece of the tree at `root`, m, and the side of it: +1 or -1."""
    k = root
    while link[k, LAST] == link[k, FIRST]:  # down to the leaf that is likely to hold it
        left = k + 1
        right = link[left, SKIP]
        k = left if _to_box2(node[left], x, y) <= _to_box2(node[right], x, y) else right
    best, side = np.inf, 1.0
    for m in range(link[k, FIRST], link[k, LAST]):
        best, side = _nearer(piece[m], x, y, best, side)
    seen = k
    end = link[root, SKIP]
    k = root
    while k < end:
        if k == seen or _to_box2(node[k], x, y) >= best * best:
            k = link[k, SKIP]
            continue
        for m in range(link[k, FIRST], link[k, LAST]):
            best, side = _nearer(piece[m], x, y, best, side)
        k += 1
    return best, side


@outer_kernel
def within(
    node: np.ndarray, link: np.ndarray, piece: np.ndarray, root: int, x: float, y: float
) -> bool:
    """Whether a ray in the direction of +x leaves through an odd number of pieces."""
    odd = False
    k = root
    end = link[root, SKIP]
    while k < end:
        box = node[k]
        if y < box[1] or y > box[4] or x > box[3]:
            k = link[k, SKIP]
            continue
        for m in range(link[k, FIRST], link[k, LAST]):
            if _passes(piece[m], x, y):
                odd = not odd
        k += 1
    return odd


@inner_kernel
def _to_box2(box: np.ndarray, x: float, y: float) -> float:
    """Square of the distance to a box of the plane, m^2."""
    dx = max(box[0] - x, 0.0, x - box[3])
    dy = max(box[1] - y, 0.0, y - box[4])
    return float(dx * dx + dy * dy)


@inner_kernel
def _nearer(p: np.ndarray, x: float, y: float, best: float, side: float) -> tuple[float, float]:
    """Distance and side of the piece where it is nearer than the best so far, else those."""
    distance, value = np.inf, 0.0
    if p[_TURN] == 0.0:
        dx, dy = x - p[0], y - p[1]
        along = dx * p[7] + dy * p[8]
        if along > 0.0 and (x - p[2]) * p[7] + (y - p[3]) * p[8] < 0.0:
            value = p[7] * dy - p[8] * dx
            distance = abs(value)
    else:
        dx, dy = x - p[4], y - p[5]
        rho = math.sqrt(dx * dx + dy * dy)
        if dx * p[7] + dy * p[8] >= rho * p[9]:
            value = p[_TURN] * (p[6] - rho)
            distance = abs(value)
    if distance == np.inf:
        ax, ay, bx, by = x - p[0], y - p[1], x - p[2], y - p[3]
        from_start, from_end = ax * ax + ay * ay, bx * bx + by * by
        if from_start <= from_end:
            distance = math.sqrt(from_start)
            value = ax * p[11] + ay * p[12]
        else:
            distance = math.sqrt(from_end)
            value = bx * p[13] + by * p[14]
    if distance < best:
        return distance, (1.0 if value >= 0.0 else -1.0)
    return best, side


@inner_kernel
def _passes(p: np.ndarray, x: float, y: float) -> bool:
    """Whether the ray from a point in the direction of +x leaves through the piece."""
    upward = p[3] > y
    if (p[1] > y) == upward:
        return False
    if p[_TURN] == 0.0:
        cross = p[7] * (y - p[1]) - p[8] * (x - p[0])
        return bool((cross > 0.0) == upward)
    dx, dy = x - p[4], y - p[5]
    inside = dx * dx + dy * dy < p[6] * p[6]
    if p[7] > 0.0:  # the right half of a circle: all that lies left of it
        return bool(dx < 0.0 or inside)
    return bool(dx < 0.0 and not inside)
