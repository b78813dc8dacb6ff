"""Shapes drawn in a plane: what they give, and what is refused."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from driftwell.boundary.drawn import solve_drawn
from driftwell.boundary.multipoles import planar_content, round_content
from driftwell.electrodes.faults import electrode_faults
from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms.faults import read_form
from driftwell.geometry.outline import Outline
from driftwell.geometry.strokes import strokes, turns_around

ROUND: Geometry = "axisymmetric"
FLAT: Geometry = "planar"


def shape(**keys: Any) -> ShapeForm:
    """A shape as a scenario states it, lengths in mm."""
    found, faults = read_form(Electrode, _electrode(keys))
    assert found is not None, faults
    return found.shape[0]


def refused(**keys: Any) -> tuple[tuple[str | int, ...], str]:
    """Where and why a shape cannot be read."""
    found, faults = read_form(Electrode, _electrode(keys))
    assert found is None
    return faults[0].path[2:], faults[0].needed


def _electrode(keys: dict[str, Any]) -> dict[str, Any]:
    return {"name": "a", "voltage": "1 V", "shape": [_in_mm(keys)]}


def _in_mm(value: Any) -> Any:
    if isinstance(value, dict):
        return {name: _in_mm(part) for name, part in value.items()}
    if isinstance(value, list | tuple):
        return [_in_mm(part) for part in value]
    return (
        f"{value} mm" if isinstance(value, int | float) and not isinstance(value, bool) else value
    )


def fault(geometry: Geometry, **keys: Any) -> tuple[tuple[str | int, ...], str]:
    """Where and why a shape does not suit a geometry."""
    faults = shape(**keys).faults(geometry)
    assert 1 == len(faults)
    return faults[0].path, faults[0].needed


def drawn(geometry: Geometry, **keys: Any) -> Outline:
    one = shape(**keys)
    assert [] == one.faults(geometry)
    assert one.drawn()
    assert one.words()
    return one.outline(geometry)


def area(one: Outline) -> float:
    """Of what an outline bounds, by Green's theorem, m^2; open loops are closed along the axis."""
    found = strokes(one)
    t, w = np.polynomial.legendre.leggauss(20)
    total = 0.0
    for s, share in zip(0.5 * (t + 1.0), 0.5 * w, strict=True):
        along = np.exp(1j * (found.direction + found.curvature * found.length * s))
        total += share * float((found.at(found.length * s).real * along.imag * found.length).sum())
    return abs(total)


def test_an_outline_of_lines_and_arcs_bounds_its_area() -> None:
    """A square with a half circle on top, in mm."""
    path = [(0, 0), (2, 0), (2, 2), {"through": (1, 3), "to": (0, 2)}]
    found = drawn(FLAT, kind="outline", path=path)
    assert found.solid
    assert (4.0 + math.pi / 2.0) * 1e-6 == pytest.approx(area(found))


def test_an_outline_that_is_not_closed_is_a_thin_sheet() -> None:
    found = drawn(FLAT, kind="outline", path=[(0, 0), (1, 0), (1, 1)], closed=False)
    assert not found.solid
    assert 2e-3 == pytest.approx(strokes(found).length.sum())


def test_an_outline_from_axis_to_axis_is_closed_by_the_axis() -> None:
    for path in ([(0, 0), (1, 0), (1, 2), (0, 2)], [(1, 0), (1, 2), (0, 2), (0, 0)]):
        found = drawn(ROUND, kind="outline", path=path)
        assert 3 == len(found.pieces)
        assert 2e-6 == pytest.approx(area(found))


def test_a_circle_on_the_axis_is_a_ball() -> None:
    found = drawn(ROUND, kind="circle", centre=(0, 1), radius=2)
    assert 1 == len(found.pieces)
    assert 2e-3 * math.pi == pytest.approx(strokes(found).length.sum())


def test_what_has_no_place_about_the_axis_is_refused() -> None:
    where, why = fault(ROUND, kind="circle", centre=(0.5, 0), radius=1)
    assert ("centre", 0) == where
    assert "must be 0 (a ball) or greater than the radius, 1 mm (a torus)" in why
    assert ("low",) == fault(ROUND, kind="rectangle", low=(-1, 0), high=(1, 1))[0]
    path = [(0.5, 0), {"through": (-0.1, 1), "to": (0.5, 2)}]
    where, why = fault(ROUND, kind="outline", path=path)
    assert (("path",), "r must not be negative; it comes down to -100 um here") == (where, why)
    why = fault(ROUND, kind="outline", path=[(0, 0), (0, 1)], closed=False)[1]
    assert "must not lie on the axis" in why


def test_outlines_that_cannot_be_are_refused_where_they_fail() -> None:
    where, why = fault(FLAT, kind="outline", path=[(0, 0), (1, 1), (1, 0), (0, 1)])
    assert (("path",), "must not cross or touch itself, as at (500 um, 500 um)") == (where, why)
    assert ("path", 1) == fault(FLAT, kind="outline", path=[(0, 0), (0, 0), (1, 0)])[0]
    assert "bounds no area" in fault(FLAT, kind="outline", path=[(0, 0), (1, 0)])[1]
    path = [(0, 0), {"through": (0, 0), "to": (1, 0)}]
    assert ("path", 1, "through") == fault(FLAT, kind="outline", path=path)[0]
    path = [(0, 0), {"through": (1, 1), "to": (0, 0)}]
    assert "draw a full circle as two arcs" in fault(FLAT, kind="outline", path=path)[1]


def test_paths_that_cannot_be_read_are_refused() -> None:
    assert "needs at least 2 points" in refused(kind="outline", path=[(0, 0)])[1]
    path = [{"through": (1, 1), "to": (2, 0)}, (0, 0)]
    assert "must begin with a point" in refused(kind="outline", path=path)[1]
    path = [(0, 0), {"trough": (1, 1), "to": (2, 0)}]
    where, why = refused(kind="outline", path=path)
    assert (("path", 1, "trough"), 'unknown key; did you mean "through"?') == (where, why)
    where, why = refused(kind="outline", path=[(0, 0), (1,)])
    assert ("path", 1) == where
    assert "there are 1 here" in why


def test_hyperbolas_are_where_their_equations_say() -> None:
    """r^2/r0^2 - 2 z^2/r0^2 = 1 and -1 to 1e-8 of the size, about a centre."""
    for part, value in (("ring", 1.0), ("upper-cap", -1.0), ("lower-cap", -1.0)):
        found = strokes(
            drawn(ROUND, kind="hyperbola", part=part, radius=10, outer=25, centre=(0, 3))
        )
        points = found.at(0.37 * found.length)
        points = points[found.curvature != 0.0]
        r, z = points.real / 0.01, (points.imag - 0.003) / 0.01
        gap = (r**2 - 2.0 * z**2 - value) / np.hypot(2.0 * r, 4.0 * z)
        assert np.abs(gap).max() * 0.01 < 2e-8 * 0.025


@pytest.mark.parametrize("part", ["ring", "upper-cap", "lower-cap"])
def test_the_metal_of_hyperbolas_is_away_from_the_centre(part: str) -> None:
    found = strokes(drawn(ROUND, kind="hyperbola", part=part, radius=10, outer=25))
    where = {"ring": 0.02, "upper-cap": 1e-4 + 0.01j, "lower-cap": 1e-4 - 0.01j}[part]
    if part != "ring":
        back = np.array([found.end[-1] - found.start[0]])
        assert 0.0 == pytest.approx(back.real[0], abs=1e-15)
        start, closing = found.end[-1:], -back
        found = type(found)(
            np.append(found.start, start),
            np.append(found.direction, np.angle(closing)),
            np.append(found.curvature, 0.0),
            np.append(found.length, np.abs(closing)),
        )
    turns = turns_around(np.array([where, 1e-4]), found)
    assert [1, 0] == [abs(turn) for turn in turns.tolist()]


def test_a_hyperbolic_trap_has_a_pure_quadrupole() -> None:
    """Ring at 1 V, caps at none: (r^2/r0^2 - 2 z^2/r0^2 + 1)/2; cut off at 3 r0."""
    electrodes = [
        (drawn(ROUND, kind="hyperbola", part=part, radius=10, outer=30),)
        for part in ("ring", "upper-cap", "lower-cap")
    ]
    content = round_content(solve_drawn(electrodes, True, 1e-6).potential, 0.005)
    expected = np.zeros(13)
    expected[[0, 2]] = 0.5, -0.25
    assert expected == pytest.approx(content.zonal[0], abs=1e-7)


def test_hyperbolic_rods_have_a_pure_quadrupole() -> None:
    """Pairs at 1 V and 0: 1/2 + (x^2 - y^2)/(2 r0^2); cut off at 3 r0."""
    pairs = [
        tuple(drawn(FLAT, kind="hyperbola", part=part, radius=10, outer=30) for part in pair)
        for pair in (("right", "left"), ("upper", "lower"))
    ]
    content = planar_content(solve_drawn(pairs, False, 1e-6).potential, 0.005)
    expected = np.zeros(13)
    expected[[0, 2]] = 0.5, 0.125
    assert expected == pytest.approx(content.cosine[0], abs=1e-6)
    assert np.zeros(13) == pytest.approx(content.sine[0], abs=1e-9)


def test_spindle_and_barrel_hold_the_quadro_logarithmic_field() -> None:
    """Off the middle plane as well, in parts of the voltage: what the open ends 24 mm away let in
    is 1e-6. R. D. Knight, Appl. Phys. Lett. 38 (1981) 221."""
    common = {"kind": "quadro-logarithmic", "characteristic_radius": 22, "along": (-24, 24)}
    pair = [
        (drawn(ROUND, part="spindle", radius=6, **common),),
        (drawn(ROUND, part="barrel", radius=15, outer=25, **common),),
    ]

    def ideal(r: np.ndarray, z: np.ndarray) -> np.ndarray:
        return np.asarray(z**2 / 2 - r**2 / 4 + 22.0**2 / 2 * np.log(r / 22.0))

    r, z = np.array([10.0, 10.0, 8.0, 12.0]), np.array([0.0, 4.0, -6.0, 3.0])
    inner, outer = ideal(np.array([6.0, 15.0]), np.zeros(2))
    expected = (ideal(r, z) - outer) / (inner - outer)
    found = solve_drawn(pair, True, 1e-6).potential(np.stack([r, z], axis=1) * 1e-3)[0]
    assert expected == pytest.approx(found, abs=3e-6)


def test_curved_electrodes_in_the_wrong_geometry_are_refused() -> None:
    where, why = fault(FLAT, kind="hyperbola", part="ring", radius=10, outer=30)
    assert ("part",) == where
    assert '"right", "left", "upper", "lower" where the geometry is planar' in why
    where, _ = fault(ROUND, kind="hyperbola", part="ring", radius=10, outer=30, centre=(1, 0))
    assert ("centre", 0) == where
    spindle = {"kind": "quadro-logarithmic", "part": "spindle", "radius": 6}
    spindle |= {"characteristic_radius": 22}
    assert ("kind",) == fault(FLAT, along=(-1, 1), **spindle)[0]
    assert "make it shorter" in fault(ROUND, along=(-90, 1), **spindle)[1]


def test_a_scenario_says_which_shape_does_not_suit_its_geometry() -> None:
    ring = _electrode({"kind": "hyperbola", "part": "ring", "radius": 10, "outer": 30})
    one, _ = read_form(Electrode, ring)
    planar, _ = read_form(Electrodes, {"geometry": "planar"})
    assert one is not None
    faults = electrode_faults(planar, [one], Path())
    assert [("electrode", 0, "shape", 0, "part")] == [fault.path for fault in faults]


def test_curved_electrodes_that_cannot_be_are_refused() -> None:
    assert (
        "`outer` must be greater" in refused(kind="hyperbola", part="ring", radius=10, outer=9)[1]
    )
    common = {"kind": "quadro-logarithmic", "characteristic_radius": 22, "along": (-1, 1)}
    assert "a barrel needs `outer`" in refused(part="barrel", radius=15, **common)[1]
    assert "leave it out" in refused(part="spindle", radius=15, outer=20, **common)[1]
    assert "less than `characteristic_radius`" in refused(part="spindle", radius=22, **common)[1]
