"""Kernels of potential maps: what they give of a known potential, and how smoothly."""

from __future__ import annotations

import itertools

import numpy as np
import pytest
from scipy.interpolate import BSpline

from driftwell.fields.evaluation import FieldValues
from driftwell.fields.maps.grid import Grid, grid_over, spline_coefficients
from driftwell.fields.maps.potential_map import (
    CONSTANT_ONE,
    MapGeometry,
    map_values,
    packed_map,
)
from driftwell.fields.maps.spline_sums import (
    first_derivatives,
    second_derivatives,
    spline_sums,
    weights,
)
from driftwell.fields.table import electric_field, field_table
from tests.potential_sources import LineCharge, PointCharges, Ring

ORIGIN = (0.0, 0.0, 0.0)
RING = Ring(1.5, 0.3)
CASES = {
    "axisymmetric": (RING, ((0.0, 1.0), (-1.0, 1.2)), (33, 71), (True, False)),
    "planar": (LineCharge(1.6, 0.4), ((-1.0, 0.9), (-0.5, 1.0)), (49, 41), (False, False)),
    "spatial": (
        PointCharges([(1.7, 0.3, 0.2)]),
        ((-0.5, 0.6), (-0.7, 0.5), (-0.4, 0.4)),
        (23, 25, 17),
        (False,) * 3,
    ),
}
GEOMETRIES = list(CASES)


def made(geometry: MapGeometry) -> tuple[Grid, np.ndarray]:
    source, region, counts, mirrors = CASES[geometry]
    grid = grid_over(region, counts, mirrors)
    values = source.potential(grid.nodes()).reshape(-1, *counts)
    return grid, spline_coefficients(values, mirrors)


def places(grid: Grid, count: int = 200, seed: int = 4) -> np.ndarray:
    low, high = np.array(grid.region()).T
    return np.random.default_rng(seed).uniform(low, high, (count, grid.axes))


def in_space(geometry: MapGeometry, points: np.ndarray, turn: float = 0.0) -> np.ndarray:
    """Places (3, n) of points in the map's coordinates, turned about z where it is round."""
    out = np.zeros((3, len(points)))
    if geometry == "axisymmetric":
        out[0], out[1] = points[:, 0] * np.cos(turn), points[:, 0] * np.sin(turn)
        out[2] = points[:, 1]
    else:
        out[: points.shape[1]] = points.T
    return out


def through_table(
    geometry: MapGeometry, grid: Grid, coefficients: np.ndarray, position: np.ndarray
) -> FieldValues:
    """Potential and field of the packed map through the dispatch of all kinds."""
    table = field_table([packed_map(geometry, grid, coefficients, ORIGIN, CONSTANT_ONE)])
    potential, field = np.empty(position.shape[1]), np.zeros(position.shape)
    one = np.ones(position.shape[1])
    row = int(table.kind[0]), table.parameter[0], table.data
    for i in range(one.size):
        potential[i] = electric_field(*row, 1.0, position, one, i, i + 1, field)
    return FieldValues(potential, field, field, potential)


def test_weights_are_those_of_the_b_spline_of_degree_five() -> None:
    """Against scipy's de Boor recursion on whole knots."""
    t = np.linspace(0.0, 1.0, 11)
    for k, order in itertools.product(range(6), range(3)):
        basis = BSpline(np.arange(-5.0, 7.0), np.eye(6)[k], 5)
        expected = basis.derivative(order)(t) if order else basis(t)
        assert expected == pytest.approx(weights(t, order)[:, k], abs=1e-13)


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_a_map_gives_the_potential_and_field_it_was_made_of(geometry: MapGeometry) -> None:
    """Field to 2e-5 of its largest: spacings are about 1/15 of the distance to the sources."""
    source = CASES[geometry][0]
    grid, coefficients = made(geometry)
    points = np.abs(places(grid)) if geometry == "axisymmetric" else places(grid)
    potential, field = map_values(
        packed_map(geometry, grid, coefficients[0], ORIGIN, CONSTANT_ONE), points
    )
    expected = source.field(points)[0]
    assert source.potential(points)[0] == pytest.approx(potential, rel=2e-6)
    assert expected == pytest.approx(field, abs=2e-5 * np.abs(expected).max())


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_the_kernel_gives_the_same_as_sums_written_out_plainly(geometry: MapGeometry) -> None:
    grid, coefficients = made(geometry)
    points = places(grid)
    plain = spline_sums(
        grid, coefficients, points, [(0,) * grid.axes, *first_derivatives(grid.axes)]
    )[0]
    values = through_table(geometry, grid, coefficients[0], in_space(geometry, points))
    used = [0, 2] if geometry == "axisymmetric" else list(range(grid.axes))
    scale = np.abs(plain).max()
    assert plain[:, 0] == pytest.approx(values.potential, abs=1e-14 * scale)
    assert -plain[:, 1:] == pytest.approx(values.electric[used].T, abs=1e-12 * scale)


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_the_force_is_minus_the_gradient_of_the_potential_to_rounding(
    geometry: MapGeometry,
) -> None:
    """Differences of order 8 within one cell, where the spline is a polynomial of degree 5."""
    grid, coefficients = made(geometry)
    steps = np.array([-4, -3, -2, -1, 1, 2, 3, 4]) * 0.1
    factors = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 4 / 5, -1 / 5, 4 / 105, -1 / 280])
    random = np.random.default_rng(9)
    cells = np.array([random.integers(1, n - 2, 30) for n in grid.counts]).T
    points = np.array(grid.origin) + (cells + 0.5) * grid.spacing
    position = in_space(geometry, points)
    found = through_table(geometry, grid, coefficients[0], position).electric
    used = [0, 2] if geometry == "axisymmetric" else list(range(grid.axes))
    for axis, h in zip(used, grid.spacing, strict=True):
        moved = np.zeros((3, 1))
        moved[axis] = h
        values = [
            through_table(geometry, grid, coefficients[0], position + step * moved).potential
            for step in steps
        ]
        slope = sum(f * v for f, v in zip(factors, values, strict=True)) / (0.1 * h)
        assert -slope == pytest.approx(found[axis], abs=2e-12 * np.abs(values).max() / h)


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_second_derivatives_go_on_across_the_borders_of_cells(geometry: MapGeometry) -> None:
    grid, coefficients = made(geometry)
    random = np.random.default_rng(2)
    rough = random.normal(size=coefficients.shape)  # smoothness must not come from the values
    for axis in range(grid.axes):
        points = np.abs(places(grid, 50))
        node = grid.axis(axis)[1:-1]
        points[:, axis] = random.choice(node, 50)
        tiny = np.zeros(grid.axes)
        tiny[axis] = 1e-9 * grid.spacing[axis]
        wanted = second_derivatives(grid.axes)
        left, right = (
            spline_sums(grid, rough, points + side * tiny, wanted)[0] for side in (-1.0, 1.0)
        )
        assert left == pytest.approx(right, abs=1e-7 * np.abs(left).max())
        assert np.abs(left).max() > 1.0


def test_a_round_map_is_the_same_at_every_azimuth_and_pulls_towards_the_axis() -> None:
    grid, coefficients = made("axisymmetric")
    points = np.array([[0.4, 0.2], [1e-3, 0.5], [1e-12, -0.3]])
    first = through_table("axisymmetric", grid, coefficients[0], in_space("axisymmetric", points))
    for turn in (1.0, 2.5, 4.0):
        place = in_space("axisymmetric", points, turn)
        values = through_table("axisymmetric", grid, coefficients[0], place)
        radial = np.cos(turn) * values.electric[0] + np.sin(turn) * values.electric[1]
        across = np.cos(turn) * values.electric[1] - np.sin(turn) * values.electric[0]
        assert first.potential == pytest.approx(values.potential, rel=1e-14)
        assert first.electric[0] == pytest.approx(radial, abs=1e-13)
        assert np.zeros(3) == pytest.approx(across, abs=1e-13)


def test_a_round_map_is_smooth_through_the_axis() -> None:
    """E_r / r keeps its value down to 1e-9 of the radius, and E_r is 0 on the axis itself."""
    grid, coefficients = made("axisymmetric")
    limit = spline_sums(grid, coefficients, np.array([[0.0, 0.25]]), [(2, 0)])[0, 0, 0]
    for r, tolerance in ((1e-3, 1e-5), (1e-6, 1e-7)):
        place = np.array([[0.6 * r], [0.8 * r], [0.25]])
        field = through_table("axisymmetric", grid, coefficients[0], place).electric[:, 0]
        assert -limit * place[:2, 0] == pytest.approx(field[:2], rel=tolerance)
    field = through_table("axisymmetric", grid, coefficients[0], np.array([[0.0], [0.0], [0.25]]))
    assert [0.0, 0.0] == field.electric[:2, 0].tolist()


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_mirrored_halves_give_the_same_as_the_whole(geometry: MapGeometry) -> None:
    """Charges in both halves make an even potential; each axis is folded in turn."""
    axes = 3 if geometry == "spatial" else 2
    sides = [np.array(s) for s in itertools.product((1.0, -1.0), repeat=3)]
    charges = PointCharges([tuple(s * (1.3, 1.4, 1.6)) for s in sides])
    region = ((-1.0, 1.0),) * axes

    def coefficients(grid: Grid) -> np.ndarray:
        nodes = np.zeros((grid.size, 3))
        nodes[:, [0, 2] if geometry == "axisymmetric" else list(range(axes))] = grid.nodes()
        values = charges.potential(nodes).sum(axis=0)
        return spline_coefficients(values.reshape(1, *grid.counts), grid.mirrors)[0]

    round_map = geometry == "axisymmetric"
    plain = (round_map, *(False,) * (axes - 1))
    whole = grid_over(region, (25 if round_map else 49, *(49,) * (axes - 1)), plain)
    points = places(whole, 100)
    expected = map_values(
        packed_map(geometry, whole, coefficients(whole), ORIGIN, CONSTANT_ONE), points
    )
    for axis in range(1 if round_map else 0, axes):
        mirrors = tuple(plain[a] or a == axis for a in range(axes))
        counts = tuple(25 if m else 49 for m in mirrors)
        half = grid_over(region, counts, mirrors)
        found = map_values(
            packed_map(geometry, half, coefficients(half), ORIGIN, CONSTANT_ONE), points
        )
        assert whole.region() == half.region()
        assert expected[0] == pytest.approx(found[0], rel=1e-9)
        assert expected[1] == pytest.approx(found[1], abs=1e-8 * np.abs(expected[1]).max())


@pytest.mark.parametrize("geometry", GEOMETRIES)
def test_outside_of_its_grid_a_map_goes_on_smoothly(geometry: MapGeometry) -> None:
    grid, coefficients = made(geometry)
    corner = np.array([ends[1] for ends in grid.region()])
    just = 1e-7 * np.array(grid.spacing)
    inner = through_table(
        geometry, grid, coefficients[0], in_space(geometry, corner[None] - just)
    ).electric
    outer = through_table(
        geometry, grid, coefficients[0], in_space(geometry, corner[None] + just)
    ).electric
    far = through_table(geometry, grid, coefficients[0], np.full((3, 1), 1e9))
    lost = through_table(geometry, grid, coefficients[0], np.full((3, 1), np.nan))
    assert inner == pytest.approx(outer, abs=1e-5 * np.abs(inner).max())
    assert np.all(np.isfinite(far.electric))
    assert np.isnan(lost.potential[0])


def test_a_packed_array_reaches_the_table_unchanged() -> None:
    grid, coefficients = made("planar")
    packed = packed_map("planar", grid, coefficients[0], ORIGIN, CONSTANT_ONE)
    table = field_table([packed, packed])
    assert isinstance(packed.data, np.ndarray)
    for row in range(2):
        found = table.data[table.first[row] : table.first[row + 1]]
        assert packed.data.tobytes() == found.tobytes()
