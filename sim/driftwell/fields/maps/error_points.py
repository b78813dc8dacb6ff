"""The random points at which the field of a map is compared with its source."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.fields.maps.continuation import in_half, surface_normals
from driftwell.fields.maps.grid import Grid
from driftwell.fields.maps.source import Asked, Depth
from driftwell.fields.maps.spline_sums import first_derivatives, spline_sums

Floats = NDArray[np.float64]
Region = Sequence[tuple[float, float]]

COUNT = 4000
FAINT = 0.01
"""Part of the strongest electrode's rms field that errors of fainter ones are compared with."""
_FEW = 50
_SEED = 20


@dataclass(slots=True)
class ErrorPoints:
    """Random points in the open part of a region, and the source's field there.

    points : (n, d), m
    distance : (n,), from the nearest surface, m
    field : (e, n, d), 1/m
    clearance : points nearer to a surface do not count, m
    """

    points: Floats
    distance: Floats
    field: Floats
    clearance: float

    @property
    def far(self) -> NDArray[np.bool_]:
        """Which points count."""
        return np.asarray(self.distance >= self.clearance)

    @property
    def rms_field(self) -> Floats:
        """(e,) rms field of each electrode at the points that count."""
        squares = np.sum(self.field[:, self.far] ** 2, axis=2)
        return np.asarray(np.sqrt(np.mean(squares, axis=1)))

    @property
    def scale(self) -> Floats:
        """(e,) what errors are compared with."""
        scale = np.maximum(self.rms_field, FAINT * self.rms_field.max())
        return np.where(scale == 0.0, 1.0, scale)


def points_of_region(
    ends: Region, asked: Asked, depth: Depth | None, clearance: float
) -> ErrorPoints:
    """Points all over a region, so many that :data:`COUNT` of them count."""
    random = np.random.default_rng(_SEED)
    low, high = np.array(ends).T
    points = np.empty((0, len(ends)))
    distance = np.empty(0)
    for _ in range(50):
        more = random.uniform(low, high, (COUNT, len(ends)))
        away = depth(more) if depth is not None else np.full(COUNT, np.inf)
        points = np.concatenate([points, more[away > 0.0]])
        distance = np.concatenate([distance, away[away > 0.0]])
        if (distance >= clearance).sum() >= COUNT:
            break
    if len(points) < _FEW:
        raise ScenarioError(
            "the region of the field lies within the electrodes; give [electrodes] a region in "
            "the open space between them"
        )
    if (distance >= clearance).sum() < _FEW:
        clearance = 0.0
    return ErrorPoints(points, distance, asked.field(points), clearance)


def field_errors(grid: Grid, coefficients: Floats, tests: ErrorPoints, scale: Floats) -> Floats:
    """Errors (e, n) of the field at test points, as parts of each electrode's rms field."""
    found = -spline_sums(grid, coefficients, tests.points, first_derivatives(grid.axes))
    return np.asarray(np.sqrt(np.sum((found - tests.field) ** 2, axis=2)) / scale[:, None])


def points_beside_surfaces(
    ends: Region, grid: Grid, reach: float, asked: Asked, depth: Depth, is_round: bool
) -> ErrorPoints:
    """Points within a reach of surfaces, where a draw from the whole region has few."""
    random = np.random.default_rng(_SEED + 1)
    low, high = np.array(ends).T
    spacing = np.array(grid.spacing)
    points = random.uniform(low, high, (20 * COUNT, len(ends)))
    away = depth(points)
    close = np.flatnonzero(np.abs(away) < 2.0 * reach)[: COUNT // 2]
    points, away = points[close], away[close]
    normal = surface_normals(points, depth, 0.05 * spacing, is_round)
    wanted = reach * random.uniform(0.0, 1.0, len(points))
    points = in_half(points + (wanted - away)[:, None] * normal, is_round)
    distance = depth(points)
    kept = (distance > 0.0) & np.all((points >= low) & (points <= high), axis=1)
    points, distance = points[kept], distance[kept]
    return ErrorPoints(points, distance, asked.field(points), 0.0)
