"""Triangles of a plane area with holes.

A rectangle becomes a grid. Any other area gets two thin layers of quads along its edges, where the
charge crowds, and Delaunay's triangles inside (delaunay.py). Edges that come too close to others
are halved before.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray
from scipy.spatial import KDTree

from driftwell.geometry.delaunay import Border, filled_within
from driftwell.geometry.outline import Outline
from driftwell.geometry.patches import grid_triangles
from driftwell.geometry.stations import Chain, Fineness

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_LAYERS = (0.03, 0.12, 0.3)
"""Depths of the layers' bounds, in lengths of the edges beside."""
_PASSES = 12
"""Rounds of halving edges; sharp corners would go on for ever."""


def cap(outline: Outline, loops: list[Chain], how: Fineness) -> tuple[list[Chain], Floats, Ints]:
    """The loops, perhaps with more stations, points (n, 2), and triangles, counter-clockwise.

    Raises ValueError where an area cannot be filled.
    """
    grid = _rectangle_grid(loops)
    if grid is not None:
        return loops, *grid
    loops = _halved_where_close(outline, loops)
    for layers in (_LAYERS, _LAYERS[:1], ()):
        filled = _filled(loops, layers, how.size)
        if filled is not None:
            return loops, *filled
    raise ValueError("the area within the outline cannot be cut into triangles")


def _rectangle_grid(loops: list[Chain]) -> tuple[Floats, Ints] | None:
    """The grid of one loop of four sides along x and y; None of any other shape."""
    if len(loops) != 1:
        return None
    chain = loops[0]
    points = chain.points
    low, high = points.min(axis=0), points.max(axis=0)
    size = high - low
    on_x = np.abs(points[:, 0, None] - np.stack([low[0], high[0]])) <= 1e-12 * size[0]
    on_y = np.abs(points[:, 1, None] - np.stack([low[1], high[1]])) <= 1e-12 * size[1]
    if not np.all(on_x.any(axis=1) | on_y.any(axis=1)) or len(np.unique(chain.piece)) != 4:
        return None
    bottom, top = np.sort(points[on_y[:, 0], 0]), np.sort(points[on_y[:, 1], 0])
    left, right = np.sort(points[on_x[:, 0], 1]), np.sort(points[on_x[:, 1], 1])
    if len(bottom) != len(top) or len(left) != len(right):
        return None
    x, y = np.meshgrid(bottom, left, indexing="ij")
    return np.stack([x.ravel(), y.ravel()], axis=1), grid_triangles(len(bottom), len(left), False)


def _halved_where_close(outline: Outline, loops: list[Chain]) -> list[Chain]:
    """Halve edges that other loops, or far parts of their own, come too close to."""
    for _ in range(_PASSES):
        points = np.concatenate([loop.points for loop in loops])
        tree = KDTree(points)
        changed, found, offset = False, [], 0
        for loop in loops:
            count = len(loop.points)
            ends = np.roll(loop.points, -1, axis=0)
            middle = 0.5 * (loop.points + ends)
            length = np.linalg.norm(ends - loop.points, axis=1)
            near = tree.query_ball_point(middle, 0.999 * length)
            own = np.arange(count)
            close = np.array(
                [
                    any(
                        not (offset <= p < offset + count)
                        or (p - offset - k + 1) % count > 3  # not the edge's ends and the next ones
                        for p in which
                    )
                    for k, which in zip(own, near, strict=True)
                ]
            )
            offset += count
            found.append(_halved(outline, loop, close) if close.any() else loop)
            changed |= bool(close.any())
        loops = found
        if not changed:
            break
    return loops


def _halved(outline: Outline, loop: Chain, which: NDArray[np.bool_]) -> Chain:
    """The loop with a station in the middle of some edges, on the arc where they are arcs."""
    points, pieces = [], []
    count = len(loop.points)
    for k in range(count):
        points.append(loop.points[k])
        pieces.append(loop.piece[k])
        if which[k]:
            start, end = loop.points[k], loop.points[(k + 1) % count]
            middle = 0.5 * (start + end)
            piece = outline.pieces[loop.piece[k]]
            if piece[6] != 0.0:
                centre = piece[4:6]
                reach = 0.5 * (np.linalg.norm(start - centre) + np.linalg.norm(end - centre))
                middle = centre + (middle - centre) * reach / np.linalg.norm(middle - centre)
            points.append(middle)
            pieces.append(loop.piece[k])
    return replace(loop, points=np.array(points), piece=np.array(pieces, dtype=np.int64))


def _filled(
    loops: list[Chain], layers: tuple[float, ...], size: float
) -> tuple[Floats, Ints] | None:
    """Layers of quads along the loops and triangles within; None where edges are lost.

    Points on the innermost layer appear twice.
    """
    points: list[Floats] = []
    triangles: list[Ints] = []
    rims: list[Floats] = []
    edges: list[Ints] = []
    offset = rim_offset = 0
    for loop in loops:
        rings = [loop.points, *(_offset(loop, depth) for depth in layers)]
        count = len(loop.points)
        points += rings
        quads = grid_triangles(len(rings), count, True)
        # rows go inwards: seen from above they turn left where the inside is to the left
        triangles.append((quads if not loop.inside_left else quads[:, ::-1]) + offset)
        rims.append(rings[-1])
        own = np.arange(count)
        edges.append(rim_offset + np.stack([own, np.roll(own, -1)], axis=1))
        offset += len(rings) * count
        rim_offset += count
    found = filled_within(Border(np.concatenate(rims), np.concatenate(edges)), size)
    if found is None:
        return None
    points.append(found[0])
    triangles.append(found[1] + offset)
    return np.concatenate(points), np.concatenate(triangles)


def _offset(loop: Chain, depth: float) -> Floats:
    """The loop moved inwards by a part of the shorter edge beside each station."""
    before = loop.points - np.roll(loop.points, 1, axis=0)
    after = np.roll(before, -1, axis=0)
    length_before = np.linalg.norm(before, axis=1)
    length_after = np.linalg.norm(after, axis=1)
    left = _left(before / length_before[:, None]) + _left(after / length_after[:, None])
    # the mitre: both edges move by the same depth
    left *= 2.0 / np.maximum(np.sum(left**2, axis=1), 0.5)[:, None]
    sign = 1.0 if loop.inside_left else -1.0
    moved = sign * depth * np.minimum(length_before, length_after)
    return np.asarray(loop.points + moved[:, None] * left)


def _left(along: Floats) -> Floats:
    return np.stack([-along[:, 1], along[:, 0]], axis=1)
