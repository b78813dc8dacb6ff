"""Potential maps in the time loop's kernels against scipy's interpolators on the same values."""

from __future__ import annotations

import ctypes
import time
from collections.abc import Callable
from functools import partial
from typing import Any

import numpy as np
from scipy.interpolate import RectBivariateSpline, RegularGridInterpolator
from scipy.special import ellipe, ellipk

from bench_cases.timing import best_of, side_by_side

COUNT = 1 << 16
Floats = np.ndarray


def field_map(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """Potential and field at 65 536 places, one thread: (r, z) and space, spread and clustered."""
    rows = [
        *_round_rows(repeats),
        *_spatial_rows(repeats),
    ]
    first = rows[0]
    return {
        "ratio": first["ratio"],
        "seconds": COUNT / (1e6 * first["million_a_second"]),
        "reference": "scipy RectBivariateSpline, degree 5",
        "reference_seconds": COUNT / (1e6 * first["million_a_second"]) * first["ratio"],
        "n": COUNT,
        "threads": 1,
        "rows": rows,
    }


def _row(
    name: str,
    nodes: str,
    error: float,
    ours: Callable[[], Any],
    theirs: Callable[[], Any],
    repeats: int,
    of: str,
) -> dict[str, Any]:
    found = side_by_side(_timed(ours), _timed(theirs), repeats)
    return {
        "map": name,
        "nodes": nodes,
        "rms_error": error,
        "million_a_second": COUNT / found["seconds"] / 1e6,
        "ratio": found["ratio"],
        "against": of,
    }


def _timed(work: Callable[[], Any]) -> Callable[[], float]:
    """The least seconds of a few: a call takes milliseconds, less than another's slice of time."""

    def once() -> float:
        began = time.perf_counter()
        work()
        return time.perf_counter() - began

    return lambda: best_of(5, once)


def _kernel(geometry: Any, grid: Any, values: Floats) -> Callable[[Floats, Floats], Any]:
    """A function that adds the field at places (3, n) to an array, through the table's dispatch."""
    from driftwell.fields.maps.grid import spline_coefficients
    from driftwell.fields.maps.potential_map import CONSTANT_ONE, packed_map
    from driftwell.fields.table import electric_field, field_table

    found = spline_coefficients(values[None], grid.mirrors)[0]
    table = field_table([packed_map(geometry, grid, found, (0.0, 0.0, 0.0), CONSTANT_ONE)])
    row = int(table.kind[0]), table.parameter[0], table.data
    one = np.ones(COUNT)

    def add(place: Floats, out: Floats) -> Any:
        return electric_field(*row, 1.0, place, one, 0, COUNT, out)

    return add


def _point_charges(places: Floats) -> tuple[Floats, Floats]:
    """Potential (n,) and field (3, n) of four charges beside the region |x|, |y|, |z| < 1."""
    sources = np.array([[1.6, 0.3, 0.2], [-0.2, 1.7, -0.4], [0.3, -1.6, 0.5], [0.1, 0.2, -1.8]])
    away = places[:, :, None] - sources.T[:, None, :]
    distance = np.sqrt(np.sum(away**2, axis=0))
    return np.sum(1.0 / distance, axis=1), np.sum(away / distance**3, axis=2)


def _ring(r: Floats, z: Floats) -> tuple[Floats, Floats, Floats]:
    """Potential, E_r, E_z of a charged ring of radius 1.5 at z = 0.3, by elliptic integrals."""
    radius, z = 1.5, z - 0.3
    span, near = np.hypot(r + radius, z), (radius - r) ** 2 + z**2
    m = 4.0 * r * radius / span**2
    first, second = ellipk(m), ellipe(m)
    radial = first - (radius**2 - r**2 + z**2) / near * second
    radial = radial / (np.pi * np.where(r > 0.0, r, 1.0) * span)
    return 2.0 / np.pi * first / span, radial, 2.0 / np.pi * z * second / (span * near)


def _spread(half: tuple[float, float, float], part: float) -> Floats:
    """Places (3, n) all over a box, or over a part of it off its middle."""
    random = np.random.default_rng(7)
    edge = np.array(half)[:, None]
    return np.ascontiguousarray(edge * (random.uniform(-part, part, (3, COUNT)) + 0.3 * (part < 1)))


def _round_rows(repeats: int) -> list[dict[str, Any]]:
    """Against RectBivariateSpline of degree 5: potential and two slopes at each place."""
    from driftwell.fields.maps.grid import grid_over

    grid = grid_over(((0.0, 1.0), (-1.0, 1.0)), (33, 65), (True, False))
    nodes = grid.nodes().T
    values = _ring(*nodes)[0].reshape(grid.counts)
    add = _kernel("axisymmetric", grid, values)
    spline = RectBivariateSpline(grid.axis(0), grid.axis(1), values, kx=5, ky=5)
    rows = []
    for name, part in (("(r, z), spread", 1.0), ("(r, z), clustered", 0.02)):
        place = _spread((0.7, 0.7, 1.0), part)
        out = np.zeros((3, COUNT))
        add(place, out)
        r = np.hypot(place[0], place[1])
        _, radial, axial = _ring(r, place[2])
        found = (out[0] * place[0] + out[1] * place[1]) / r
        error = np.sqrt(
            np.mean((found - radial) ** 2 + (out[2] - axial) ** 2) / np.mean(radial**2 + axial**2)
        )

        def by_scipy(place: Floats = place) -> Any:
            r, z = np.hypot(place[0], place[1]), place[2]
            potential = spline.ev(r, z)
            across = -spline.ev(r, z, dx=1) / r
            return potential, across * place[0], across * place[1], -spline.ev(r, z, dy=1)

        of = "RectBivariateSpline, degree 5"
        ours = partial(add, place, out)
        rows.append(_row(name, "33 x 65", float(error), ours, by_scipy, repeats, of))
    return rows


def _spatial_rows(repeats: int) -> list[dict[str, Any]]:
    """Against RegularGridInterpolator, linear: potential and three components in one call."""
    from driftwell.fields.maps.grid import grid_over

    rows = []
    for side in (33, 65):
        grid = grid_over(((-1.0, 1.0),) * 3, (side,) * 3, (False,) * 3)
        values, field = _point_charges(grid.nodes().T)
        add = _kernel("spatial", grid, values.reshape(grid.counts))
        four = np.concatenate([values[None], field]).T.reshape(*grid.counts, 4)
        linear = RegularGridInterpolator(tuple(grid.axis(a) for a in range(3)), four)
        for name, part in (("space, spread", 1.0), ("space, clustered", 0.02)):
            place = _spread((1.0, 1.0, 1.0), part)
            out = np.zeros((3, COUNT))
            add(place, out)
            expected = _point_charges(place)[1]
            error = np.sqrt(np.mean((out - expected) ** 2) / np.mean(expected**2))
            points = np.ascontiguousarray(place.T)
            ours, theirs = partial(add, place, out), partial(linear, points)
            of = "RegularGridInterpolator, linear"
            rows.append(_row(name, f"{side}^3", float(error), ours, theirs, repeats, of))
    return rows
