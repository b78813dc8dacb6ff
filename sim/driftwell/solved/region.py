"""The part of space that electrodes enclose, or lie around, found by looking out from their centre.

Rays go out until they meet an electrode, with steps as long as the distance to the nearest one
allows. Where a ray begins inside an electrode it first leaves it.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Distance = Callable[[Floats], Floats]
"""Signed distance (n,), m, of points (n, d) to the nearest electrode, negative inside."""

RAYS = 720
_STEPS = 200
_NEAR = 1e-6
"""Part of the whole size within which a ray has met an electrode."""
_FEW = 0.02
"""Where less than this part of the rays meets anything, the electrodes enclose nothing."""
_AROUND = 0.5
"""Part of their size by which the region reaches beyond electrodes that enclose nothing."""


class Box(NamedTuple):
    """Least and largest coordinates (d,), m."""

    low: Floats
    high: Floats


def enclosed(distance: Distance, box: Box, axisymmetric: bool) -> Box:
    """What electrodes within a `box` enclose: in (r, z) if axisymmetric, else about the origin."""
    size = float(np.linalg.norm(box.high - box.low))
    if axisymmetric:
        return _about_axis(distance, box, size)
    ways = _circle() if len(box.low) == 2 else _sphere()
    points, met = _looked(distance, np.zeros_like(ways), ways, size)
    if met.mean() < _FEW:
        return _beyond(box)
    return Box(points[met].min(axis=0), points[met].max(axis=0))


def _about_axis(distance: Distance, box: Box, size: float) -> Box:
    """As far as rays from the axis get, and along it until it is closed, or a radius beyond."""
    z = np.linspace(box.low[1], box.high[1], RAYS)
    starts = np.stack([np.zeros(RAYS), z], axis=1)
    points, met = _looked(distance, starts, np.tile([1.0, 0.0], (RAYS, 1)), size)
    if met.mean() < _FEW:
        around = _beyond(box)
        return Box(np.array([0.0, around.low[1]]), around.high)
    radius = float(points[met, 0].max())
    low, high = float(box.low[1]) - radius, float(box.high[1]) + radius
    r = np.linspace(0.0, radius, RAYS)
    starts = np.stack([r, np.zeros(RAYS)], axis=1)
    starts = starts[distance(starts) > 0.0]
    for way in (-1.0, 1.0):
        ends, stopped = _looked(distance, starts, np.tile([0.0, way], (len(starts), 1)), size)
        if len(starts) and stopped.all():
            if way < 0.0:
                low = float(ends[:, 1].min())
            else:
                high = float(ends[:, 1].max())
    return Box(np.array([0.0, low]), np.array([radius, high]))


def _beyond(box: Box) -> Box:
    """The box and some room around it."""
    room = _AROUND * float((box.high - box.low).max())
    return Box(box.low - room, box.high + room)


def _looked(
    distance: Distance, starts: Floats, ways: Floats, size: float
) -> tuple[Floats, NDArray[np.bool_]]:
    """Where rays end, and which of them met an electrode from outside."""
    points = starts.copy()
    there = distance(points)
    outside = there > 0.0
    met = np.zeros(len(points), dtype=np.bool_)
    for _ in range(_STEPS):
        going = ~met & (np.linalg.norm(points - starts, axis=1) < 2.0 * size)
        if not going.any():
            break
        step = np.maximum(np.abs(there[going]), _NEAR * size)
        points[going] += step[:, None] * ways[going]
        there[going] = distance(points[going])
        met |= going & outside & (there < _NEAR * size)
        outside |= there > _NEAR * size
    return points, met


def _circle() -> Floats:
    angle = 2.0 * np.pi * np.arange(RAYS) / RAYS
    return np.stack([np.cos(angle), np.sin(angle)], axis=1)


def _sphere() -> Floats:
    """Directions spread evenly over the sphere, along a spiral."""
    z = 1.0 - (2.0 * np.arange(RAYS) + 1.0) / RAYS
    angle = np.pi * (3.0 - np.sqrt(5.0)) * np.arange(RAYS)
    r = np.sqrt(1.0 - z * z)
    return np.stack([r * np.cos(angle), r * np.sin(angle), z], axis=1)
