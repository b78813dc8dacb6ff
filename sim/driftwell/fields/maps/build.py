"""A map of unit potentials, its grid refined until the field is as good as asked for.

The error of a map is measured at random points in the open part of the region, against the field
of the source itself. Which axis to refine is told without asking the source: the spline through
every second node along an axis misses the nodes between by what that axis errs at twice its
spacing. An axis grows by at most a factor of 2; then the nodes of before are used again.
"""

from __future__ import annotations

import dataclasses
import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.fields.maps.continuation import Depth, PotentialSource, continue_inside
from driftwell.fields.maps.grid import (
    FEWEST,
    Grid,
    axis_coefficients,
    grid_over,
    spline_coefficients,
)
from driftwell.fields.maps.potential_map import MapGeometry, PotentialMap
from driftwell.fields.maps.reached import Reached, errors_by_distance
from driftwell.fields.maps.spline_sums import first_derivatives, spline_sums, weights

Floats = NDArray[np.float64]
Region = Sequence[tuple[float, float]]

MOST_NODES = 4_000_000
TEST_POINTS = 4000
NEAR_PART = 0.02
"""Clearance left out: this part of the region's smallest extent."""
FAINT = 0.01
"""Part of the strongest electrode's rms field that errors of fainter ones are compared with."""
_FIRST = 17
_AT_ONCE = 65536
_DISTANCES = (0.0, 0.5, 1.0, 2.0, 4.0, 8.0)
_SEED = 20
_ORDER = 5.0


@dataclass(slots=True)
class _Asked:
    """The source, with a count of what it was asked."""

    source: PotentialSource
    count: int = 0
    told: Callable[[int], None] | None = None

    def potential(self, points: Floats) -> Floats:
        return self._in_parts(self.source.potential, points)

    def field(self, points: Floats) -> Floats:
        return self._in_parts(self.source.field, points)

    def _in_parts(self, ask: Callable[[Floats], Floats], points: Floats) -> Floats:
        parts = []
        for start in range(0, len(points), _AT_ONCE):
            some = np.ascontiguousarray(points[start : start + _AT_ONCE])
            parts.append(np.asarray(ask(some), dtype=np.float64))
            self.count += len(some)
            if self.told is not None:
                self.told(self.count)
        return np.concatenate(parts, axis=1)


@dataclass(slots=True)
class _Tests:
    """Random points in the open part of a region, and the source's field there."""

    points: Floats
    distance: Floats
    field: Floats
    far: NDArray[np.bool_]
    scale: Floats = dataclasses.field(init=False)
    rms_field: Floats = dataclasses.field(init=False)

    def __post_init__(self) -> None:
        squares = np.sum(self.field[:, self.far] ** 2, axis=2)
        self.rms_field = np.sqrt(np.mean(squares, axis=1))
        self.scale = np.maximum(self.rms_field, FAINT * self.rms_field.max())
        self.scale[self.scale == 0.0] = 1.0


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
    asked = _Asked(source, told=told)
    extents = [high - low for low, high in region]
    if clearance is None:
        clearance = NEAR_PART * min(extents) if depth is not None else 0.0
    ends = [
        (0.0, max(abs(low), abs(high))) if m else (low, high)
        for (low, high), m in zip(region, mirrored, strict=True)
    ]
    tests = _test_points(ends, asked, depth, clearance)
    counts = _first_counts(ends, most_nodes)
    best: PotentialMap | None = None
    made: _Made | None = None
    poor = 0
    while True:
        made = _made(tuple(ends), counts, mirrored, asked, depth, geometry, made)
        reached = _measured(made, tests, accuracy, clearance, asked.count)
        gain = best.reached.largest / reached.largest if best and reached.largest else math.inf
        if best is None or gain > 1.0:
            best = PotentialMap(geometry, made.grid, made.coefficients, reached)
        poor = poor + 1 if gain < 1.1 else 0
        if reached.met or poor == 2:
            break
        wider = _next_counts(made, tests.scale, clearance, reached.largest / accuracy, most_nodes)
        if wider is None:
            break
        counts = wider
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


def _test_points(ends: Region, asked: _Asked, depth: Depth | None, clearance: float) -> _Tests:
    random = np.random.default_rng(_SEED)
    low, high = np.array(ends).T
    points = np.empty((0, len(ends)))
    distance = np.empty(0)
    for _ in range(50):
        more = random.uniform(low, high, (TEST_POINTS, len(ends)))
        away = depth(more) if depth is not None else np.full(TEST_POINTS, np.inf)
        points = np.concatenate([points, more[away > 0.0]])
        distance = np.concatenate([distance, away[away > 0.0]])
        if (distance >= clearance).sum() >= TEST_POINTS:
            break
    if len(points) < 50:
        raise ScenarioError(
            "the region of the field lies within the electrodes; give [electrodes] a region in "
            "the open space between them"
        )
    far = distance >= clearance
    if far.sum() < 50:
        far[:] = True
    return _Tests(points, distance, asked.field(points), far)


@dataclass(slots=True)
class _Made:
    """A grid with the source's potentials at its nodes, and the splines through them.

    values : (e, n0, n1, ...), as the source gave them
    filled : the same, continued into conductors
    distance : (n0, n1, ...), of the nodes from the nearest surface
    """

    grid: Grid
    values: Floats
    filled: Floats
    distance: Floats
    coefficients: Floats


def _made(
    ends: Region,
    counts: tuple[int, ...],
    mirrors: tuple[bool, ...],
    asked: _Asked,
    depth: Depth | None,
    geometry: MapGeometry,
    before: _Made | None,
) -> _Made:
    grid = grid_over(tuple(ends), counts, mirrors)
    nodes = grid.nodes()
    known = np.zeros(counts, dtype=bool)
    every: tuple[slice, ...] = ()
    if before is not None:
        steps = [(n - 1) / (old - 1) for n, old in zip(counts, before.grid.counts, strict=True)]
        if all(step in (1.0, 2.0) for step in steps):
            every = tuple(slice(None, None, int(step)) for step in steps)
            known[every] = True
    new = np.flatnonzero(~known.ravel())
    fresh = asked.potential(nodes[new])
    values = np.empty((fresh.shape[0], grid.size))
    values[:, new] = fresh
    shaped = values.reshape(-1, *counts)
    if before is not None and every:
        shaped[(slice(None), *every)] = before.values
    distance = depth(nodes) if depth is not None else np.full(grid.size, np.inf)
    filled = values.copy()
    if depth is not None:
        is_round = geometry == "axisymmetric"
        continue_inside(filled, nodes, distance, grid.spacing, asked, depth, is_round)
    filled = filled.reshape(-1, *counts)
    return _Made(
        grid, shaped, filled, distance.reshape(counts), spline_coefficients(filled, mirrors)
    )


def _measured(
    made: _Made, tests: _Tests, accuracy: float, clearance: float, evaluations: int
) -> Reached:
    wanted = first_derivatives(made.grid.axes)
    found = -spline_sums(made.grid, made.coefficients, tests.points, wanted)
    error = np.sqrt(np.sum((found - tests.field) ** 2, axis=2)) / tests.scale[:, None]
    far = error[:, tests.far]
    edges = np.append(np.array(_DISTANCES) * max(made.grid.spacing), np.inf)
    return Reached(
        wanted=accuracy,
        rms=float(np.sqrt(np.mean(far**2, axis=1)).max()),
        largest=float(far.max()),
        clearance=clearance,
        points=len(tests.points),
        near=errors_by_distance(error, tests.distance, edges),
        rms_field=tests.rms_field,
        evaluations=evaluations,
    )


def _next_counts(
    made: _Made, scale: Floats, clearance: float, excess: float, most_nodes: int
) -> tuple[int, ...] | None:
    """Counts of the next grid; None where it would have too many nodes or be the same."""
    counts = made.grid.counts
    missed = np.array([_missed(made, axis, scale, clearance) for axis in range(len(counts))])
    worst = missed.max()
    growth = min(2.0, max(1.25, (1.5 * excess) ** (1.0 / _ORDER)))
    share = missed / worst if worst > 0.0 else np.ones(len(counts))
    factors = np.clip(growth * np.maximum(share, 1e-9) ** (1.0 / _ORDER), 1.0, 2.0)
    factors[factors < 1.1] = 1.0
    while True:
        wider = tuple(
            2 * n - 1 if f > 1.6 else 1 + math.ceil((n - 1) * f - 1e-9)
            for n, f in zip(counts, factors, strict=True)
        )
        if math.prod(wider) <= most_nodes:
            return wider if wider != counts else None
        factors = np.maximum(1.0, np.minimum(factors, 1.6) * 0.95)
        if factors.max() < 1.05:
            return None


def _missed(made: _Made, axis: int, scale: Floats, clearance: float) -> float:
    """How far the spline through every second node along an axis misses those between, as a field.

    The largest over the nodes beyond the clearance, as part of each electrode's field, one cell
    counted as the length.
    """
    lines = np.moveaxis(made.filled, axis + 1, 0)
    count = lines.shape[0]
    kept = lines[::2]
    if kept.shape[0] < FEWEST:
        return math.inf
    found = axis_coefficients(kept.reshape(kept.shape[0], -1), made.grid.mirrors[axis])
    middle = weights(np.array([0.5]), 0)[0]
    cells = kept.shape[0] - 1
    between = sum(w * found[k : k + cells] for k, w in enumerate(middle))
    missed = np.abs(between - lines[1:count:2][:cells].reshape(cells, -1))
    missed = missed.reshape(cells, *lines.shape[1:])
    away = np.moveaxis(made.distance, axis, 0)[1:count:2][:cells]
    open_nodes = np.where(away[:, None] >= clearance, missed, 0.0)
    worst = open_nodes.max(axis=(0, *range(2, open_nodes.ndim)))
    return float(np.max(worst / scale) / made.grid.spacing[axis])
