"""How strongly the potential of a map is curved: how fast charges swing in it."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.grid import Grid
from driftwell.fields.maps.spline_sums import second_derivatives, spline_sums

Floats = NDArray[np.float64]

USUAL = 0.95
"""Part of the map that is curved less than the number given; beside electrodes it may be more."""
_MOST_PLACES = 20_000


def some_nodes(grid: Grid) -> NDArray[np.int64]:
    """Numbers of nodes, evenly over a grid, not too many."""
    return np.arange(0, grid.size, 1 + grid.size // _MOST_PLACES)


def usual_curvature(grid: Grid, coefficients: Floats) -> float:
    """Largest curvature of the potential (n0 + 4, ...), V/m^2, over all but a few places."""
    return most_curved(grid, coefficients, grid.nodes()[some_nodes(grid)])


def most_curved(grid: Grid, coefficients: Floats, places: Floats) -> float:
    """Largest curvature of the potential, V/m^2, at all but a few of the places (n, d), m.

    Places outside the grid do not count; 0 where none is inside.
    """
    low, high = np.array(grid.region()).T
    places = places[np.all((places >= low) & (places <= high), axis=1)]
    if not len(places):
        return 0.0
    bends = spline_sums(grid, coefficients[None], places, second_derivatives(grid.axes))[0]
    matrices = bends.reshape(-1, grid.axes, grid.axes)
    return float(np.quantile(np.abs(np.linalg.eigvalsh(matrices)).max(axis=1), USUAL))
