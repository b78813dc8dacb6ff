"""Shapes of clouds: moments in closed form, distributions, and what all kinds have in common."""

from __future__ import annotations

import math
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from scipy.stats import kstest

from driftwell.forms.declared import kind_name
from driftwell.forms.faults import Fault
from driftwell.particles.shapes.table import SHAPE_KINDS
from driftwell.particles.state import Particles

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]

MANY = 100_000
MM = 1e-3

BEAM = {
    "emittance": ["5 mm mrad", "2 mm mrad"],
    "beta": ["0.8 m", "0.2 m"],
    "alpha": [1, -0.5],
    "kinetic_energy": "30 keV",
    "energy_spread": "1 keV",
    "length": "40 mm",
}
EXAMPLES: dict[str, dict[str, Any]] = {
    "points": {"positions": [["1 mm", "2 mm", "3 mm"], ["0 mm", "-1 mm", "4 mm"]]},
    "line": {"start": ["0 mm", "0 mm", "-2 mm"], "end": ["3 mm", "0 mm", "2 mm"]},
    "ring": {"radius": "2 mm", "axis": [0, 1, 0]},
    "gaussian": {"sigma": ["1 mm", "2 mm", "3 mm"]},
    "ball": {"radius": "2 mm"},
    "ellipsoid": {"semi_axes": ["1 mm", "2 mm", "5 mm"]},
    "cylinder": {"radius": "2 mm", "length": "6 mm", "axis": [1, 0, 0]},
    "box": {"size": ["1 mm", "2 mm", "3 mm"]},
    "beam-kv": BEAM,
    "beam-waterbag": BEAM,
    "beam-parabolic": BEAM,
    "beam-gaussian": BEAM,
    "file": {"path": "start.csv"},
}
OWN_COUNT = {"points", "file"}
RANDOM = sorted(set(EXAMPLES) - OWN_COUNT)


def shaped(
    load: Load, kind: str, folder: Path = Path(), count: int | None = 500, **keys: Any
) -> Particles:
    shape = {"kind": kind} | EXAMPLES[kind] | keys
    return load(shape=shape, count=None if kind in OWN_COUNT else count, folder=folder)


@pytest.fixture
def folder(tmp_path: Path) -> Path:
    """A scenario's folder with the file the examples name."""
    (tmp_path / "start.csv").write_text("x [mm], y [mm], z [mm]\n1, 2, 3\n-1, 0, 4\n")
    return tmp_path


def test_every_kind_of_shape_has_an_example_here() -> None:
    assert set(EXAMPLES) == {kind_name(kind) for kind in SHAPE_KINDS}


@pytest.mark.parametrize("kind", sorted(EXAMPLES))
def test_every_shape_fills_the_whole_state_of_its_charges(
    load: Load, kind: str, folder: Path
) -> None:
    shape = {"kind": kind} | EXAMPLES[kind]
    count = None if kind in OWN_COUNT else 40
    found = load(shape=shape, count=count, folder=folder, first_id=10)
    n = count or 2
    assert (3, n) == found.position.shape == found.velocity.shape
    assert found.position.flags.c_contiguous
    assert found.velocity.flags.c_contiguous
    assert list(range(10, 10 + n)) == found.id.tolist()
    assert n == len(np.unique(found.position, axis=1).T)
    for name in ("charge", "mass", "weight", "species", "cloud", "birth_time"):
        assert (n,) == getattr(found, name).shape


@pytest.mark.parametrize("kind", sorted(EXAMPLES))
def test_every_shape_moves_with_its_centre(load: Load, kind: str, folder: Path) -> None:
    here = shaped(load, kind, folder)
    there = shaped(load, kind, folder, centre=["1 m", "-2 m", "3 m"])
    expected = here.position + np.array([[1.0], [-2.0], [3.0]])
    assert np.allclose(expected, there.position, rtol=0.0, atol=1e-15)
    assert here.velocity.tolist() == there.velocity.tolist()


@pytest.mark.parametrize("kind", sorted(EXAMPLES))
def test_every_shape_is_told_in_one_sentence(
    words_of: Callable[..., str], kind: str, folder: Path
) -> None:
    count = None if kind in OWN_COUNT else 7
    said = words_of(shape={"kind": kind} | EXAMPLES[kind], count=count, folder=folder)
    assert said.startswith(f"{count or 2} ion charges (")
    assert "\n" not in said
    assert len(said) < 250


@pytest.mark.parametrize("placing", ["random", "even"])
@pytest.mark.parametrize("kind", RANDOM)
def test_a_larger_count_keeps_the_first_charges_where_they_were(
    load: Load, kind: str, placing: str
) -> None:
    """Not so for charges at equal distances along a line or ring."""
    few = shaped(load, kind, count=100, placing=placing)
    many = shaped(load, kind, count=177, placing=placing)
    same = few.position.tolist() == many.position[:, :100].tolist()
    assert (placing == "random" or kind not in ("line", "ring")) == same
    if same:
        assert few.velocity.tolist() == many.velocity[:, :100].tolist()


# Variances along x, y, z in mm^2, closed forms of the uniform distributions (elementary integrals,
# e.g. handbook tables of second moments): line L^2/12, circle R^2/2, ball and ellipsoid a^2/5,
# cylinder R^2/4 and L^2/12, box a^2/12; beams emittance times beta.
VARIANCES = [
    ("line", {"centre": ["-1.5 mm", "0 mm", "0 mm"]}, (9.0 / 12.0, 0.0, 16.0 / 12.0)),
    ("ring", {}, (2.0, 0.0, 2.0)),
    ("gaussian", {}, (1.0, 4.0, 9.0)),
    ("gaussian", {"sigma": "2 mm"}, (4.0, 4.0, 4.0)),
    ("gaussian", {"sigma": ["0 mm", "1 mm", "0 mm"]}, (0.0, 1.0, 0.0)),
    ("ball", {}, (0.8, 0.8, 0.8)),
    ("ellipsoid", {}, (0.2, 0.8, 5.0)),
    ("cylinder", {}, (3.0, 1.0, 1.0)),
    ("cylinder", {"axis": [0, 0, -1]}, (1.0, 1.0, 3.0)),
    ("cylinder", {"axis": [3, 0, 4]}, (0.64 + 0.36 * 3.0, 1.0, 0.36 + 0.64 * 3.0)),
    ("box", {}, (1.0 / 12.0, 4.0 / 12.0, 9.0 / 12.0)),
    ("box", {"size": "6 mm"}, (3.0, 3.0, 3.0)),
    ("beam-kv", {}, (4.0, 0.4, 1600.0 / 12.0)),
    ("beam-gaussian", {"length": None, "rms_length": "7 mm"}, (4.0, 0.4, 49.0)),
]


@pytest.mark.parametrize(("placing", "tolerance"), [("random", 0.0224), ("even", 0.001)])
@pytest.mark.parametrize(("kind", "keys", "variance"), VARIANCES)
def test_second_moments_are_those_in_closed_form(
    load: Load,
    kind: str,
    keys: dict[str, Any],
    variance: tuple[float, float, float],
    placing: str,
    tolerance: float,
) -> None:
    """Within five standard errors, sqrt(2/n) at most; an even placing is far closer."""
    shape = {"kind": kind} | EXAMPLES[kind] | keys | {"placing": placing}
    shape = {name: value for name, value in shape.items() if value is not None}
    found = load(shape=shape, count=MANY).position / MM
    for axis in range(3):
        assert variance[axis] == pytest.approx(found[axis].var(), rel=tolerance, abs=1e-25)
        assert abs(found[axis].mean()) <= math.sqrt(variance[axis]) * tolerance


@pytest.mark.parametrize("placing", ["random", "even"])
def test_a_ball_has_as_many_charges_in_each_equal_part_of_its_volume(
    load: Load, placing: str
) -> None:
    x, y, z = shaped(load, "ball", count=20_000, placing=placing).position / (2.0 * MM)
    radius = np.sqrt(x**2 + y**2 + z**2)
    assert radius.max() < 1.0
    assert kstest(radius**3, "uniform").pvalue > 1e-3
    assert kstest(z / radius, "uniform", (-1.0, 2.0)).pvalue > 1e-3
    assert kstest(np.arctan2(y, x), "uniform", (-np.pi, 2.0 * np.pi)).pvalue > 1e-3


def test_an_ellipsoid_is_a_stretched_ball(load: Load) -> None:
    found = shaped(load, "ellipsoid", count=20_000).position / MM
    radius = np.linalg.norm(found / np.array([[1.0], [2.0], [5.0]]), axis=0)
    assert kstest(radius**3, "uniform").pvalue > 1e-3


def test_a_cylinder_is_uniform_across_and_along(load: Load) -> None:
    x, y, z = shaped(load, "cylinder", count=20_000).position / MM
    assert kstest((y**2 + z**2) / 4.0, "uniform").pvalue > 1e-3
    assert kstest(np.arctan2(z, y), "uniform", (-np.pi, 2.0 * np.pi)).pvalue > 1e-3
    assert kstest(x, "uniform", (-3.0, 6.0)).pvalue > 1e-3


def test_a_box_and_a_gaussian_have_the_distribution_of_their_name_on_each_axis(load: Load) -> None:
    box = shaped(load, "box", count=20_000).position / MM
    gaussian = shaped(load, "gaussian", count=20_000).position / MM
    for axis, size in enumerate((1.0, 2.0, 3.0)):
        assert kstest(box[axis], "uniform", (-size / 2.0, size)).pvalue > 1e-3
        assert kstest(gaussian[axis] / size, "norm").pvalue > 1e-3


def test_a_quiet_start_has_moments_ten_times_closer_than_a_random_one(load: Load) -> None:
    """Error of the mean square radius of a uniform ball, 3/5 R^2, rms over ten seeds."""
    error = {}
    for placing in ("random", "even"):
        errors = []
        for seed in range(10):
            shape = {"kind": "ball", "radius": "1 m", "placing": placing}
            position = load(seed=seed, shape=shape, count=3000).position
            errors.append(np.mean(np.sum(position**2, axis=0)) / 0.6 - 1.0)
        error[placing] = float(np.sqrt(np.mean(np.square(errors))))
    # standard deviation of r^2/R^2 is sqrt(12/175), so its mean's is 0.0080 of 3/5 for n = 3000
    assert (
        pytest.approx(math.sqrt(12.0 / 175.0 / 3000.0) / 0.6, rel=0.6, abs=0.0) == error["random"]
    )
    assert error["even"] < 0.1 * error["random"]


def test_an_even_line_has_equal_distances_and_a_charge_on_each_end(load: Load) -> None:
    found = shaped(load, "line", count=5).position / MM
    assert np.allclose([0.0, 0.75, 1.5, 2.25, 3.0], found[0], rtol=0.0, atol=1e-15)
    assert np.allclose([-2.0, -1.0, 0.0, 1.0, 2.0], found[2], rtol=0.0, atol=1e-15)
    assert [[1.5], [0.0], [0.0]] == (shaped(load, "line", count=1).position / MM).tolist()


def test_an_even_ring_has_equal_angles_and_begins_as_its_help_says(load: Load) -> None:
    for axis, expected in (
        ([0, 0, 5], [[2, 0, -2, 0], [0, 2, 0, -2], [0, 0, 0, 0]]),
        ([1, 0, 0], [[0, 0, 0, 0], [2, 0, -2, 0], [0, 2, 0, -2]]),
        ([0, 1, 0], [[0, 2, 0, -2], [0, 0, 0, 0], [2, 0, -2, 0]]),
    ):
        found = shaped(load, "ring", count=4, axis=axis).position / MM
        assert np.allclose(expected, found, rtol=0.0, atol=1e-15)


def test_random_charges_on_a_ring_keep_its_radius_about_a_tilted_axis(load: Load) -> None:
    found = shaped(load, "ring", count=2000, axis=[1, 2, 2], placing="random").position / MM
    assert np.allclose(2.0, np.linalg.norm(found, axis=0), rtol=1e-13)
    assert np.allclose(0.0, np.array([1.0, 2.0, 2.0]) @ found, atol=1e-13)


def test_listed_charges_are_where_and_as_fast_as_listed(load: Load) -> None:
    found = load(
        count=None,
        shape={
            "kind": "points",
            "positions": [["1 mm", "0 mm", "0 mm"], ["0 mm", "2 um", "0 mm"]],
            "velocities": [["1 km/s", "0 m/s", "0 m/s"], ["0 m/s", "0 m/s", "1.8e8 m/s"]],
        },
    )
    assert [[0.001, 0.0], [0.0, 2e-6], [0.0, 0.0]] == found.position.tolist()
    fast = 1.8e8 / math.sqrt(1.0 - (1.8e8 / 299792458.0) ** 2)
    expected = [[1000.0, 0.0], [0.0, 0.0], [0.0, fast]]
    assert np.allclose(expected, found.velocity, rtol=1e-10)


ORIGIN = ["0 m", "0 m", "0 m"]


@pytest.mark.parametrize(
    ("shape", "path", "needed"),
    [
        ({"kind": "gaussian", "sigma": "0 m"}, ("shape",), "greater than 0 on at least one axis"),
        ({"kind": "gaussian", "sigma": "-1 m"}, ("shape", "sigma"), "at least 0"),
        ({"kind": "gaussian", "sigma": ["1 m", "1 m"]}, ("shape", "sigma"), "list of 3"),
        ({"kind": "gaussian", "sigma": 3}, ("shape", "sigma"), "a length"),
        ({"kind": "gauss", "sigma": "1 m"}, ("shape", "kind"), 'did you mean "gaussian"'),
        ({"radius": "1 m"}, ("shape", "kind"), "missing"),
        ({"kind": "ball", "radius": "0 m"}, ("shape", "radius"), "greater than 0"),
        ({"kind": "ball", "radius": "1 s"}, ("shape", "radius"), "a length"),
        ({"kind": "ball", "radius": "1 m", "radios": 1}, ("shape", "radios"), '"radius"'),
        ({"kind": "ball", "radius": "1 m", "placing": "quiet"}, ("shape", "placing"), '"even"'),
        ({"kind": "line", "start": ORIGIN, "end": ORIGIN}, ("shape",), "two different points"),
        ({"kind": "ring", "radius": "1 m", "axis": [0, 0, 0]}, ("shape", "axis"), "other than 0"),
        (
            {"kind": "box", "size": ["1 m", "1 m", "0 m"]},
            ("shape", "size", 2),
            "greater than 0",
        ),
    ],
)
def test_shapes_that_cannot_be_are_faults(
    faults_of: FaultsOf, shape: dict[str, Any], path: tuple[str | int, ...], needed: str
) -> None:
    faults = faults_of(shape=shape)
    assert [path] == [fault.path for fault in faults]
    assert needed in faults[0].needed


@pytest.mark.parametrize(
    ("keys", "needed"),
    [
        ({"positions": []}, "at least one place"),
        ({"positions": [ORIGIN], "velocities": []}, "for each of the 1 positions, found 0"),
        (
            {"positions": [ORIGIN], "velocities": [["3e8 m/s", "0 m/s", "0 m/s"]]},
            "slower than light",
        ),
    ],
)
def test_lists_that_cannot_be_are_faults(
    faults_of: FaultsOf, keys: dict[str, Any], needed: str
) -> None:
    faults = faults_of(shape={"kind": "points"} | keys, count=None)
    assert [("shape",)] == [fault.path for fault in faults]
    assert needed in faults[0].needed
