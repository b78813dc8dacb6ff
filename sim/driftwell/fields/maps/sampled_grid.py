"""A source's potentials at the nodes of a grid, the splines through them, and the next finer grid.

Which axis to refine is told without asking the source: the spline through every second node along
an axis misses the nodes between by what that axis errs at twice its spacing. An axis grows by at
most a factor of 2; then the nodes of before are used again.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.continuation import continue_inside
from driftwell.fields.maps.grid import (
    FEWEST,
    Grid,
    axis_coefficients,
    grid_over,
    spline_coefficients,
)
from driftwell.fields.maps.potential_map import MapGeometry
from driftwell.fields.maps.source import Asked, Depth
from driftwell.fields.maps.spline_sums import weights

Floats = NDArray[np.float64]
Region = Sequence[tuple[float, float]]

_ORDER = 5.0
"""The field's error falls with this power of the spacing where the potential is smooth."""
_LEAST_GROWTH, _DOUBLES = 1.25, 1.6
"""Factors of the number of cells: the least worth trying, and from where on it is made 2."""


@dataclass(slots=True)
class SampledGrid:
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


def sampled(
    ends: Region,
    counts: tuple[int, ...],
    mirrors: tuple[bool, ...],
    asked: Asked,
    depth: Depth | None,
    geometry: MapGeometry,
    before: SampledGrid | None,
) -> SampledGrid:
    """The source on a grid over a region; nodes of the grid `before` are not asked for again."""
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
    return SampledGrid(
        grid, shaped, filled, distance.reshape(counts), spline_coefficients(filled, mirrors)
    )


def next_counts(
    made: SampledGrid, scale: Floats, clearance: float, excess: float, most_nodes: int
) -> tuple[int, ...] | None:
    """Counts of the next grid; None where it would have too many nodes or be the same."""
    counts = made.grid.counts
    missed = np.array([_missed(made, axis, scale, clearance) for axis in range(len(counts))])
    worst = missed.max()
    growth = min(2.0, max(_LEAST_GROWTH, (1.5 * excess) ** (1.0 / _ORDER)))
    known = 0.0 < worst < math.inf
    share = missed / worst if known else np.ones(len(counts))
    factors = np.clip(growth * np.maximum(share, 1e-9) ** (1.0 / _ORDER), 1.0, 2.0)
    factors[factors < 1.1] = 1.0
    while True:
        wider = tuple(
            2 * n - 1 if f > _DOUBLES else 1 + math.ceil((n - 1) * f - 1e-9)
            for n, f in zip(counts, factors, strict=True)
        )
        if math.prod(wider) <= most_nodes:
            return wider if wider != counts else None
        factors = np.maximum(1.0, np.minimum(factors, _DOUBLES) * 0.95)
        if factors.max() < 1.05:
            return None


def _missed(made: SampledGrid, axis: int, scale: Floats, clearance: float) -> float:
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
