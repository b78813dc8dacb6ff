"""Outlines of electrodes and walls in a plane through a scenario."""

from __future__ import annotations

import math
from collections.abc import Sequence

import contourpy
import numpy as np
from numpy.typing import NDArray

from driftwell.report.field_pictures.equipotentials import Drawn
from driftwell.report.sections.section import Section
from driftwell.walls.box import Box
from driftwell.walls.cylinder import Cylinder
from driftwell.walls.form import DetectorForm, WallForm
from driftwell.walls.plane import Plane, PlaneDetector
from driftwell.walls.sphere import Sphere

Floats = NDArray[np.float64]

TOUCH = 1e-9
"""Least distance that counts as one, as part of the largest."""
FINE = 600
"""Points along a line on which it is settled where a wall is solid."""


def outlines_of(
    across: Floats,
    up: Floats,
    distance: Floats,
    owner: NDArray[np.int64],
    names: Sequence[str],
) -> list[Drawn]:
    """Outlines of bodies over a grid, each body named once.

    distance, owner : (nu, na), signed distance to the nearest body, m, and whose it is
    """
    found: list[Drawn] = []
    far = float(np.abs(distance).max())
    padded = np.pad(distance, 1, constant_values=far)
    apart = np.maximum(np.abs(padded), TOUCH * far)  # a point on a surface is no outline of others
    for number, name in enumerate(names):
        own = np.pad(owner, 1, constant_values=-1) == number
        level = np.where(own, padded, apart)
        lines = contourpy.contour_generator(_padded(across), _padded(up), level).lines(0.0)
        longest = sorted(lines, key=len, reverse=True)  # type: ignore[arg-type]
        found += [Drawn(name if k == 0 else "", line) for k, line in enumerate(longest)]  # type: ignore[arg-type]
    return found


def wall_lines(wall: WallForm | DetectorForm, section: Section) -> list[Floats]:
    """Lines (k, 2), m, in which a surface cuts the plane: only where it is solid, or sensitive."""
    level = wall_level(wall, section.points).reshape(section.shape)
    if not (level.min() < 0.0 < level.max()):
        return []
    lines = contourpy.contour_generator(section.across, section.up, level).lines(0.0)
    pieces: list[Floats] = []
    for line in lines:
        fine = _resampled(np.asarray(line, dtype=np.float64))
        solid = wall_stops(wall, section.in_space(fine))
        pieces += _runs(fine, solid)
    return pieces


def wall_level(wall: WallForm | DetectorForm, points: Floats) -> Floats:
    """A smooth function of points (n, 3) that is zero on the surface."""
    if isinstance(wall, Cylinder):
        apart = points - np.array(wall.centre)
        apart[:, "xyz".index(wall.axis)] = 0.0
        return np.asarray(wall.radius - np.sqrt(np.sum(apart**2, axis=1)))
    if isinstance(wall, Sphere):
        apart = points - np.array(wall.centre)
        return np.asarray(wall.radius - np.sqrt(np.sum(apart**2, axis=1)))
    if isinstance(wall, Box):
        return np.asarray(
            np.min(0.5 * np.array(wall.size) - np.abs(points - np.array(wall.centre)), axis=1)
        )
    if isinstance(wall, Plane | PlaneDetector):
        return np.asarray((points - np.array(wall.at)) @ _unit(wall.normal))
    raise TypeError(type(wall).__name__)


def wall_stops(wall: WallForm | DetectorForm, points: Floats) -> NDArray[np.bool_]:
    """Whether points (n, 3) of the surface are solid: not in an opening, not beyond an end."""
    if isinstance(wall, Cylinder) and wall.length is not None:
        axis = "xyz".index(wall.axis)
        return np.asarray(np.abs(points[:, axis] - wall.centre[axis]) <= 0.5 * wall.length)
    if isinstance(wall, Plane | PlaneDetector):
        apart = points - np.array(wall.at)
        far = np.sqrt(np.sum(apart**2, axis=1))
        if isinstance(wall, PlaneDetector):
            return np.asarray(far <= (math.inf if wall.radius is None else wall.radius))
        if wall.hole is not None:
            return np.asarray(far > wall.hole.radius)
        if wall.slit is not None:
            along = apart @ _unit(wall.slit.along)
            return np.asarray(far**2 - along**2 > (0.5 * wall.slit.width) ** 2)
    return np.ones(len(points), np.bool_)


def _unit(vector: tuple[float, float, float]) -> Floats:
    return np.array(vector) / math.hypot(*vector)


def _resampled(line: Floats) -> Floats:
    """The line with many points, evenly along it."""
    length = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(line, axis=0).T))])
    if length[-1] == 0.0:
        return line
    places = np.linspace(0.0, length[-1], max(FINE, len(line)))
    return np.stack([np.interp(places, length, line[:, k]) for k in (0, 1)], axis=1)


def _runs(line: Floats, kept: NDArray[np.bool_]) -> list[Floats]:
    """The pieces of a line where `kept` is true."""
    jumps = np.flatnonzero(np.diff(kept.astype(np.int8))) + 1
    pieces = zip(np.split(line, jumps), np.split(kept, jumps), strict=True)
    return [piece for piece, solid in pieces if solid[0] and len(piece) > 1]


def _padded(values: Floats) -> Floats:
    """One more on either side."""
    step = values[1] - values[0]
    return np.concatenate([[values[0] - step], values, [values[-1] + step]])
