"""A map of unit potentials, its grid refined until the field is as good as asked for.

The error of a map is measured at random points in the open part of the region, against the field
of the source itself.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.error_points import (
    ErrorPoints,
    Region,
    field_errors,
    points_beside_surfaces,
    points_of_region,
)
from driftwell.fields.maps.grid import FEWEST
from driftwell.fields.maps.potential_map import MapGeometry, PotentialMap
from driftwell.fields.maps.reached import NearErrors, Reached, errors_by_distance
from driftwell.fields.maps.sampled_grid import SampledGrid, next_counts, sampled
from driftwell.fields.maps.source import Asked, Depth, PotentialSource

Floats = NDArray[np.float64]

MOST_NODES = 4_000_000
NEAR_PART = 0.02
"""Clearance left out: this part of the region's smallest extent."""
_FIRST = 17
_DISTANCES = (0.0, 0.5, 1.0, 2.0, 4.0, 8.0)
"""Where errors are told apart by distance, in cells."""


def build_map(
    region: Region,
    source: PotentialSource,
    accuracy: float,
    *,
    geometry: MapGeometry,
    mirrors: Sequence[bool] | None = None,
    depth: Depth | None = None,
    clearance: float | None = None,
    most_nodes: int = MOST_NODES,
    told: Callable[[int], None] | None = None,
) -> PotentialMap:
    """Potentials of a source on a grid, refined until the field error is within `accuracy`.

    Parameters
    ----------
    region : from and to along each axis, m; the axis r from 0 (or, of an annulus, from its inner
        radius)
    source : unit solutions
    accuracy : largest error of the field at the test points, as part of its rms over them
    geometry : what the coordinates are
    mirrors : for each axis, whether the source is even in it; r is, always
    depth : distance (n,) of points (n, d) from the nearest surface, negative inside conductors;
        None where there are no conductors within the region
    clearance : test points nearer to a surface do not count, but are told, m; left out:
        :data:`NEAR_PART` of the region's smallest extent
    most_nodes : of the grid
    told : called with the number of points the source was asked at so far

    Returns
    -------
    The best map found. ``reached.met`` says whether its error is within `accuracy`.

    Raises
    ------
    ScenarioError
        the region has no open part.
    """
    mirrored = _mirrors(region, geometry, mirrors)
    asked = Asked(source, told=told)
    extents = [high - low for low, high in region]
    if clearance is None:
        clearance = NEAR_PART * min(extents) if depth is not None else 0.0
    ends = [
        (0.0, max(abs(low), abs(high))) if m else (low, high)
        for (low, high), m in zip(region, mirrored, strict=True)
    ]
    tests = points_of_region(ends, asked, depth, clearance)
    counts = _first_counts(ends, most_nodes)
    best: PotentialMap | None = None
    made: SampledGrid | None = None
    poor = 0
    while True:
        made = sampled(tuple(ends), counts, mirrored, asked, depth, geometry, made)
        reached = _measured(made, tests, accuracy, asked.count)
        gain = best.reached.largest / reached.largest if best and reached.largest else math.inf
        if best is None or gain > 1.0:
            best = PotentialMap(geometry, made.grid, made.coefficients, reached)
        poor = poor + 1 if gain < 1.1 else 0
        if reached.met or poor == 2:
            break
        wider = next_counts(
            made, tests.scale, tests.clearance, reached.largest / accuracy, most_nodes
        )
        if wider is None:
            break
        counts = wider
    if depth is not None:
        close = points_beside_surfaces(
            ends,
            best.grid,
            _DISTANCES[-1] * max(best.grid.spacing),
            asked,
            depth,
            geometry == "axisymmetric",
        )
        near = _near_errors(best, tests, close)
        count = len(tests.points) + len(close.points)
        best = replace(best, reached=replace(best.reached, near=near, points=count))
    return replace(best, reached=replace(best.reached, evaluations=asked.count))


def _mirrors(
    region: Region, geometry: MapGeometry, mirrors: Sequence[bool] | None
) -> tuple[bool, ...]:
    found = list(mirrors) if mirrors is not None else [False] * len(region)
    if geometry == "axisymmetric":
        found[0] = region[0][0] <= 0.0
    return tuple(bool(m) for m in found)


def _first_counts(ends: Region, most_nodes: int) -> tuple[int, ...]:
    """Cells about as long as wide, :data:`_FIRST` nodes along the shortest axis."""
    extents = [high - low for low, high in ends]
    cell = min(extents) / (_FIRST - 1)
    longest = max(FEWEST, int(most_nodes ** (1.0 / len(ends))))
    return tuple(min(longest, 1 + math.ceil(extent / cell * (1.0 - 1e-9))) for extent in extents)


def _measured(made: SampledGrid, tests: ErrorPoints, accuracy: float, evaluations: int) -> Reached:
    error = field_errors(made.grid, made.coefficients, tests, tests.scale)
    far = error[:, tests.far]
    edges = np.append(np.array(_DISTANCES) * max(made.grid.spacing), np.inf)
    return Reached(
        wanted=accuracy,
        rms=float(np.sqrt(np.mean(far**2, axis=1)).max()),
        largest=float(far.max()),
        clearance=tests.clearance,
        points=len(tests.points),
        near=errors_by_distance(error, tests.distance, edges),
        rms_field=tests.rms_field,
        evaluations=evaluations,
    )


def _near_errors(made: PotentialMap, tests: ErrorPoints, close: ErrorPoints) -> NearErrors:
    """Errors by distance, of both draws of points."""
    errors = [
        field_errors(made.grid, made.coefficients, one, tests.scale) for one in (tests, close)
    ]
    distance = np.concatenate([tests.distance, close.distance])
    return errors_by_distance(np.concatenate(errors, axis=1), distance, made.reached.near.edges)
