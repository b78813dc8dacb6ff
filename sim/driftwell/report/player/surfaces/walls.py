"""Meshes of walls and detectors; what is endless is drawn a little beyond what happens."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.solid import Mesh
from driftwell.walls.box import Box
from driftwell.walls.cylinder import Cylinder
from driftwell.walls.form import DetectorForm, WallForm
from driftwell.walls.plane import Plane, PlaneDetector
from driftwell.walls.sphere import Sphere

Floats = NDArray[np.float64]

AROUND = 48
"""Corners of a circle."""


def finite_corners(wall: WallForm | DetectorForm) -> Floats:
    """Points (n, 3), m, that hold as much of a surface as has an end."""
    if isinstance(wall, Cylinder):
        half = np.full(3, wall.radius)
        half["xyz".index(wall.axis)] = 0.0 if wall.length is None else 0.5 * wall.length
        return np.array(wall.centre) + np.stack([-half, half])
    if isinstance(wall, Box):
        return np.array(wall.centre) + 0.5 * np.stack([-np.array(wall.size), np.array(wall.size)])
    if isinstance(wall, Sphere):
        return np.array(wall.centre) + wall.radius * np.array([[-1.0] * 3, [1.0] * 3])
    if isinstance(wall, Plane | PlaneDetector):
        if isinstance(wall, PlaneDetector) and wall.radius is not None:
            return disc(wall.at, wall.normal, 0.0, wall.radius).vertices
        return np.array([wall.at])
    raise TypeError(type(wall).__name__)


def wall_mesh(wall: WallForm | DetectorForm, low: Floats, high: Floats) -> Mesh:
    """Triangles of a wall or a detector; low, high : (3,) m, corners of what happens."""
    if isinstance(wall, Cylinder):
        axis = "xyz".index(wall.axis)
        return tube(wall, axis, _half_length(wall, axis, low, high))
    if isinstance(wall, Box):
        return hollow_box(np.array(wall.centre), 0.5 * np.array(wall.size))
    if isinstance(wall, Sphere):
        return ball(np.array(wall.centre), wall.radius)
    reach = _reach(wall.at, wall.normal, low, high) if isinstance(wall, Plane | PlaneDetector) else 0
    if isinstance(wall, PlaneDetector):
        return disc(wall.at, wall.normal, 0.0, wall.radius or reach)
    if not isinstance(wall, Plane):
        raise TypeError(type(wall).__name__)
    if wall.slit is not None:
        return slit_plane(wall, max(reach, 2.0 * wall.slit.width))
    hole = 0.0 if wall.hole is None else wall.hole.radius
    return disc(wall.at, wall.normal, hole, max(reach, 2.0 * hole))


def disc(at: tuple[float, ...], normal: tuple[float, ...], inner: float, outer: float) -> Mesh:
    """A flat ring; its corners lie on its circles."""
    first, second, _ = plane_axes(normal)
    angle = 2.0 * math.pi * np.arange(AROUND) / AROUND
    around = np.cos(angle)[:, None] * first + np.sin(angle)[:, None] * second
    k = np.arange(AROUND)
    following = (k + 1) % AROUND
    if inner <= 0.0:
        points = np.concatenate([[np.zeros(3)], outer * around])
        faces = np.stack([0 * k, 1 + k, 1 + following], axis=1)
    else:
        points = np.concatenate([inner * around, outer * around])
        one = np.stack([k, AROUND + k, AROUND + following], axis=1)
        faces = np.concatenate([one, np.stack([k, AROUND + following, following], axis=1)])
    return Mesh(np.array(at) + points, faces, False)


def slit_plane(wall: Plane, reach: float) -> Mesh:
    """A plane on both sides of a slit."""
    if wall.slit is None:
        raise ValueError("the plane has no slit")
    along = np.array(wall.slit.along) / np.linalg.norm(wall.slit.along)
    _, _, across = plane_axes(wall.normal)
    side = np.cross(across, along)
    half = 0.5 * wall.slit.width
    points, faces = [], []
    for number, sign in enumerate((-1.0, 1.0)):
        for part, length in ((half, -1), (half, 1), (reach, 1), (reach, -1)):
            points.append(sign * part * side + length * reach * along)
        first = 4 * number
        faces += [(first, first + 1, first + 2), (first, first + 2, first + 3)]
    return Mesh(np.array(wall.at) + np.array(points), np.array(faces, np.int64), False)


def tube(wall: Cylinder, axis: int, half: float) -> Mesh:
    """The side of a cylinder, open at both ends."""
    angle = 2.0 * math.pi * np.arange(AROUND) / AROUND
    heights = np.linspace(-half, half, 3)
    ring = np.zeros((AROUND, 3))
    ring[:, (axis + 1) % 3] = wall.radius * np.cos(angle)
    ring[:, (axis + 2) % 3] = wall.radius * np.sin(angle)
    points = np.concatenate([ring + height * np.eye(3)[axis] for height in heights])
    k = np.arange(AROUND)
    following = (k + 1) % AROUND
    faces = []
    for row in range(len(heights) - 1):
        low, high = row * AROUND, (row + 1) * AROUND
        faces += [
            np.stack([low + k, low + following, high + following], axis=1),
            np.stack([low + k, high + following, high + k], axis=1),
        ]
    return Mesh(np.array(wall.centre) + points, np.concatenate(faces), False)


def hollow_box(centre: Floats, half: Floats) -> Mesh:
    """The six faces of a box."""
    signs = np.array([(x, y, z) for x in (-1, 1) for y in (-1, 1) for z in (-1, 1)], np.float64)
    quads = ((0, 1, 3, 2), (4, 6, 7, 5), (0, 4, 5, 1), (2, 3, 7, 6), (0, 2, 6, 4), (1, 5, 7, 3))
    faces = [face for a, b, c, d in quads for face in ((a, b, c), (a, c, d))]
    return Mesh(centre + signs * half, np.array(faces, np.int64), True)


def ball(centre: Floats, radius: float) -> Mesh:
    """A sphere, by circles of latitude."""
    rows = AROUND // 2
    polar = math.pi * np.arange(rows + 1) / rows
    angle = 2.0 * math.pi * np.arange(AROUND) / AROUND
    points = np.stack(
        [
            np.outer(np.sin(polar), np.cos(angle)),
            np.outer(np.sin(polar), np.sin(angle)),
            np.repeat(np.cos(polar)[:, None], AROUND, axis=1),
        ],
        axis=2,
    ).reshape(-1, 3)
    k, faces = np.arange(AROUND), []
    following = (k + 1) % AROUND
    for row in range(rows):
        a, b = row * AROUND, (row + 1) * AROUND
        if row < rows - 1:
            faces.append(np.stack([a + k, b + k, b + following], axis=1))
        if row > 0:
            faces.append(np.stack([a + k, b + following, a + following], axis=1))
    return Mesh(centre + radius * points, np.concatenate(faces), True)


def plane_axes(normal: tuple[float, ...]) -> tuple[Floats, Floats, Floats]:
    """Two directions in a plane and its normal, each of length 1, at right angles."""
    across = np.array(normal) / np.linalg.norm(normal)
    helper = np.eye(3)[int(np.argmin(np.abs(across)))]
    first = np.cross(across, helper)
    first /= np.linalg.norm(first)
    return first, np.cross(across, first), across


def _half_length(wall: Cylinder, axis: int, low: Floats, high: Floats) -> float:
    if wall.length is not None:
        return 0.5 * wall.length
    centre = wall.centre[axis]
    return max(1.15 * max(high[axis] - centre, centre - low[axis]), 1.2 * wall.radius)


def _reach(at: tuple[float, ...], normal: tuple[float, ...], low: Floats, high: Floats) -> float:
    """Radius within which an endless plane is drawn: all that happens, seen across it."""
    corners = np.array([(x, y, z) for x in (low[0], high[0]) for y in (low[1], high[1])
                        for z in (low[2], high[2])])
    first, second, _ = plane_axes(normal)
    away = corners - np.array(at)
    reach = float(np.hypot(away @ first, away @ second).max())
    return 1.15 * reach or 0.5 * float(np.max(high - low)) or 1e-3
