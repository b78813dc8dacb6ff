"""Which panels are near a point: balls about them in a binary tree of balls."""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numba import prange
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel, threaded_kernel

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
_LEAF = 8
"""Balls in a leaf, at most."""


class Bounds(NamedTuple):
    """Balls, and nodes that hold them, each before what lies below it.

    place, radius : (n, 3), (n,), m, middle and radius of each ball, in the nodes' order
    which : (n,) int64, number of each ball as given
    ball : (nodes, 4), middle and radius of a ball about all balls of the node
    skip : (nodes,) int64, the node to go on with if this one is out of reach
    low, high : (nodes,) int64, balls of a leaf; none of an inner node
    """

    place: Floats
    radius: Floats
    which: Ints
    ball: Floats
    skip: Ints
    low: Ints
    high: Ints


def bounds_of(place: Floats, radius: Floats) -> Bounds:
    """The tree over balls of middles (n, 3) and radii (n,)."""
    order = np.arange(len(place))
    balls: list[tuple[float, float, float, float]] = []
    skip: list[int] = []
    lows: list[int] = []
    highs: list[int] = []
    _grow(0, len(place), order, place, radius, balls, skip, lows, highs)
    return Bounds(
        np.ascontiguousarray(place[order]),
        np.ascontiguousarray(radius[order]),
        order,
        np.array(balls).reshape(-1, 4),
        np.array(skip, dtype=np.int64),
        np.array(lows, dtype=np.int64),
        np.array(highs, dtype=np.int64),
    )


def _grow(
    low: int,
    high: int,
    order: Ints,
    place: Floats,
    radius: Floats,
    balls: list[tuple[float, float, float, float]],
    skip: list[int],
    lows: list[int],
    highs: list[int],
) -> None:
    """Append the node of ``order[low:high]`` and all below it; sorts that part of `order`."""
    own = order[low:high]
    points = place[own]
    least, most = points.min(axis=0), points.max(axis=0)
    middle = 0.5 * (least + most)
    reach = float(np.max(np.sqrt(np.sum((points - middle) ** 2, axis=1)) + radius[own]))
    node = len(balls)
    balls.append((float(middle[0]), float(middle[1]), float(middle[2]), reach * (1.0 + 1e-12)))
    skip.append(0)
    is_leaf = high - low <= _LEAF
    lows.append(low if is_leaf else 0)
    highs.append(high if is_leaf else 0)
    if not is_leaf:
        axis = int(np.argmax(most - least))
        order[low:high] = own[np.argsort(points[:, axis], kind="stable")]
        between = (low + high) // 2
        _grow(low, between, order, place, radius, balls, skip, lows, highs)
        _grow(between, high, order, place, radius, balls, skip, lows, highs)
    skip[node] = len(balls)


@inner_kernel
def next_near(
    state: tuple[int, int], x: float, y: float, z: float, reach: float, bounds: Bounds
) -> tuple[int, int, int]:
    """Go on to the next ball within `reach` of a point: (its place or -1, node, next place).

    Begin with the state (0, -1), and hand back the last two numbers for the next one. The place is
    that in the nodes' order; ``bounds.which`` tells the ball's number.
    """
    node, at = state
    nodes = bounds.skip.size
    while node < nodes:
        if at < 0:
            dx, dy, dz = (
                x - bounds.ball[node, 0],
                y - bounds.ball[node, 1],
                z - bounds.ball[node, 2],
            )
            within = reach + bounds.ball[node, 3]
            if dx * dx + dy * dy + dz * dz > within * within:
                node = bounds.skip[node]
                continue
            if bounds.high[node] == 0:
                node += 1
                continue
            at = bounds.low[node]
        while at < bounds.high[node]:
            dx, dy, dz = x - bounds.place[at, 0], y - bounds.place[at, 1], z - bounds.place[at, 2]
            within = reach + bounds.radius[at]
            at += 1
            if dx * dx + dy * dy + dz * dz < within * within:
                return at - 1, node, at
        node, at = node + 1, -1
    return -1, node, -1


@threaded_kernel
def count_near(
    points: np.ndarray, reach: np.ndarray, bounds: Bounds, out_count: np.ndarray
) -> None:
    """Numbers of balls within reach of each point; points (n, 3), reach (n,), out_count (n,)."""
    for i in prange(points.shape[0]):
        node, at = 0, -1
        count = 0
        while True:
            found, node, at = next_near(
                (node, at), points[i, 0], points[i, 1], points[i, 2], reach[i], bounds
            )
            if found < 0:
                break
            count += 1
        out_count[i] = count


@threaded_kernel
def list_near(
    points: np.ndarray,
    reach: np.ndarray,
    bounds: Bounds,
    starts: np.ndarray,
    out_which: np.ndarray,
) -> None:
    """Numbers of these balls; those of point i from ``starts[i]`` on."""
    for i in prange(points.shape[0]):
        node, at = 0, -1
        k = starts[i]
        while True:
            found, node, at = next_near(
                (node, at), points[i, 0], points[i, 1], points[i, 2], reach[i], bounds
            )
            if found < 0:
                break
            out_which[k] = bounds.which[found]
            k += 1
