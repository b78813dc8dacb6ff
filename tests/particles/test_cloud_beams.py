"""Beams by emittance and Twiss parameters, against the published ratios of their distributions."""

from __future__ import annotations

import math
from collections.abc import Callable
from typing import Any

import numpy as np
import pytest
from scipy.stats import kstest

from driftwell.forms.faults import Fault
from driftwell.particles.proper_velocity import kinetic_energy
from driftwell.particles.state import Particles

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]

EV = 1.602176634e-19
MASS = 100.0 * 1.66053906892e-27
MANY = 100_000
KINDS = ("beam-kv", "beam-waterbag", "beam-parabolic", "beam-gaussian")
ROUND = {"emittance": "1 mm mrad", "beta": "1 m", "kinetic_energy": "1 keV", "length": "1 m"}
EPSILON = 1e-6


def beam(load: Load, kind: str, **keys: Any) -> Particles:
    return load(shape={"kind": kind} | ROUND | keys, count=MANY)


def planes(particles: Particles) -> list[tuple[np.ndarray, np.ndarray]]:
    """(x, x') and (y, y') of a beam along z."""
    u = particles.velocity
    return [(particles.position[axis], u[axis] / u[2]) for axis in (0, 1)]


def rms_emittance(place: np.ndarray, slope: np.ndarray) -> float:
    """sqrt(<x^2><x'^2> - <x x'>^2) of the centred coordinates."""
    return math.sqrt(np.linalg.det(np.cov(place, slope, bias=True)))


@pytest.mark.parametrize(
    ("kind", "ratio", "tolerance"),
    # the largest of 1e5 falls short of the edge: the waterbag by about n^(-1/2), the parabolic by
    # about n^(-1/3); the rms emittance adds its sampling error, 0.3 %
    [("beam-kv", 4.0, 0.005), ("beam-waterbag", 6.0, 0.01), ("beam-parabolic", 8.0, 0.04)],
)
def test_edge_over_rms_emittance_is_the_published_ratio(
    load: Load, kind: str, ratio: float, tolerance: float
) -> None:
    """M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 5.3.4 (from memory)."""
    for place, slope in planes(beam(load, kind)):
        edge = np.max(place**2 + slope**2)  # alpha 0, beta 1 m
        assert ratio == pytest.approx(edge / rms_emittance(place, slope), rel=tolerance, abs=0.0)
        assert edge < ratio * EPSILON * (1.0 + 1e-12)


@pytest.mark.parametrize(
    ("kind", "inside"),
    [
        ("beam-kv", 1.0),
        ("beam-waterbag", 1.0 - (1.0 - 4.0 / 6.0) ** 2),
        ("beam-parabolic", 1.0 - (1.0 - 4.0 / 8.0) ** 3),
        ("beam-gaussian", 0.8646647167633873),
    ],
)
def test_the_ellipse_of_four_rms_emittances_holds_the_published_fraction(
    load: Load, kind: str, inside: float
) -> None:
    """1 - exp(-2) for the Gaussian, 1 for K-V: Reiser (1994), sec. 5.3.4 (from memory).

    The others follow by projection of a density on the 4-ball: a share 1 - (1 - a)^2 or ^3 of the
    charges is within the part a of the edge emittance.
    """
    for place, slope in planes(beam(load, kind)):
        found = np.mean(place**2 + slope**2 <= 4.0 * EPSILON * (1.0 + 1e-12))
        assert inside == pytest.approx(found, rel=0.005, abs=0.0)


@pytest.mark.parametrize(
    ("kind", "power", "edge"),
    [("beam-kv", 1, 4.0), ("beam-waterbag", 2, 6.0), ("beam-parabolic", 3, 8.0)],
)
def test_charges_are_spread_over_one_phase_plane_as_their_distribution_says(
    load: Load, kind: str, power: int, edge: float
) -> None:
    for place, slope in planes(beam(load, kind)):
        part = (place**2 + slope**2) / (edge * EPSILON)
        assert kstest(1.0 - (1.0 - part) ** power, "uniform").pvalue > 1e-3
        assert kstest(np.arctan2(slope, place), "uniform", (-np.pi, 2 * np.pi)).pvalue > 1e-3


def test_a_kv_beam_lies_on_one_ellipsoid_and_is_uniform_across(load: Load) -> None:
    found = beam(load, "beam-kv")
    (x, x_slope), (y, y_slope) = planes(found)
    square = (x**2 + x_slope**2 + y**2 + y_slope**2) / EPSILON
    assert np.allclose(4.0, square, rtol=1e-10)
    assert kstest((x**2 + y**2) / (4.0 * EPSILON), "uniform").pvalue > 1e-3


def test_a_waterbag_is_uniform_in_the_volume_of_its_ellipsoid(load: Load) -> None:
    (x, x_slope), (y, y_slope) = planes(beam(load, "beam-waterbag"))
    square = (x**2 + x_slope**2 + y**2 + y_slope**2) / (6.0 * EPSILON)
    assert kstest(square**2, "uniform").pvalue > 1e-3


def test_a_gaussian_beam_is_normal_in_all_four_coordinates(load: Load) -> None:
    four = [coordinate for plane in planes(beam(load, "beam-gaussian")) for coordinate in plane]
    for coordinate in four:
        assert kstest(coordinate / math.sqrt(EPSILON), "norm").pvalue > 1e-3
    assert np.allclose(np.eye(4), np.corrcoef(four), atol=5.0 / math.sqrt(MANY))


@pytest.mark.parametrize("kind", KINDS)
def test_emittance_and_twiss_parameters_come_out_as_they_went_in(load: Load, kind: str) -> None:
    """<x^2> = eps beta, <x x'> = -eps alpha, <x'^2> = eps (1 + alpha^2) / beta."""
    found = beam(
        load,
        kind,
        emittance=["5 mm mrad", "0.2 mm mrad"],
        alpha=[1.5, -0.5],
        beta=["0.8 m", "2 m"],
        placing="even",
    )
    twiss = [(5e-6, 1.5, 0.8), (0.2e-6, -0.5, 2.0)]
    for (place, slope), (emittance, alpha, beta) in zip(planes(found), twiss, strict=True):
        assert emittance == pytest.approx(rms_emittance(place, slope), rel=0.001, abs=0.0)
        assert emittance * beta == pytest.approx(np.mean(place**2), rel=0.001, abs=0.0)
        assert -emittance * alpha == pytest.approx(np.mean(place * slope), rel=0.002, abs=0.0)
        expected = emittance * (1.0 + alpha**2) / beta
        assert expected == pytest.approx(np.mean(slope**2), rel=0.001, abs=0.0)


@pytest.mark.parametrize("kind", KINDS)
def test_a_beam_has_the_kinetic_energy_and_spread_it_declares(load: Load, kind: str) -> None:
    cold = kinetic_energy(beam(load, kind).velocity, MASS) / EV
    assert [1e3, 1e3] == pytest.approx([cold.min(), cold.max()], rel=1e-12, abs=0.0)
    warm = kinetic_energy(beam(load, kind, energy_spread="50 eV").velocity, MASS) / EV
    assert 1e3 == pytest.approx(warm.mean(), abs=50.0 * 5.0 / math.sqrt(MANY))
    assert 50.0 == pytest.approx(warm.std(), rel=5.0 / math.sqrt(2.0 * MANY), abs=0.0)


def test_a_bunch_is_as_long_as_it_declares(load: Load) -> None:
    uniform = beam(load, "beam-kv", length="40 mm").position[2]
    assert kstest(uniform, "uniform", (-0.02, 0.04)).pvalue > 1e-3
    gaussian = load(
        shape={"kind": "beam-kv", "rms_length": "3 mm"}
        | {name: value for name, value in ROUND.items() if name != "length"},
        count=MANY,
    ).position[2]
    assert kstest(gaussian / 3e-3, "norm").pvalue > 1e-3


def test_a_beam_along_x_is_the_beam_along_z_turned(load: Load) -> None:
    keys: dict[str, Any] = {"emittance": ["5 mm mrad", "0.2 mm mrad"], "alpha": [1, 0]}
    z, x = beam(load, "beam-kv", **keys), beam(load, "beam-kv", along=[1, 0, 0], **keys)
    assert np.allclose(z.position, x.position[[1, 2, 0]], rtol=0.0, atol=1e-18)
    assert np.allclose(z.velocity, x.velocity[[1, 2, 0]], rtol=0.0, atol=1e-9)


def test_a_beam_with_positive_alpha_converges(load: Load) -> None:
    (x, slope), _ = planes(beam(load, "beam-gaussian", alpha=2.0))
    before, after = np.mean(x**2), np.mean((x + 0.1 * slope) ** 2)
    assert after < before


@pytest.mark.parametrize(
    ("keys", "path", "needed"),
    [
        ({"rms_length": "1 mm"}, ("shape",), "either `length` or `rms_length`"),
        ({"length": None}, ("shape",), "either `length` or `rms_length`"),
        ({"energy_spread": "201 eV"}, ("shape",), "at most a fifth"),
        ({"emittance": "0 mm mrad"}, ("shape", "emittance"), "greater than 0"),
        ({"emittance": "1 mm"}, ("shape", "emittance"), None),
        ({"emittance": "1 mm/s"}, ("shape", "emittance"), "an emittance"),
        ({"beta": ["1 m", "-1 m"]}, ("shape", "beta", 1), "greater than 0"),
        ({"beta": ["1 m", "1 m", "1 m"]}, ("shape", "beta"), "list of 2"),
        ({"kinetic_energy": None}, ("shape", "kinetic_energy"), "missing"),
        ({"along": [0, 0, 0]}, ("shape", "along"), "other than 0"),
    ],
)
def test_beams_that_cannot_be_are_faults(
    faults_of: FaultsOf, keys: dict[str, Any], path: tuple[str | int, ...], needed: str | None
) -> None:
    shape = {"kind": "beam-kv"} | ROUND | keys
    faults = faults_of(shape={name: value for name, value in shape.items() if value is not None})
    assert ([] if needed is None else [path]) == [fault.path for fault in faults]
    if needed is not None:
        assert needed in faults[0].needed


def test_a_beam_leaves_no_room_for_a_motion(faults_of: FaultsOf) -> None:
    faults = faults_of(shape={"kind": "beam-kv"} | ROUND, motion={"temperature": "300 K"})
    assert [("motion",)] == [fault.path for fault in faults]
    assert "leave out `motion`" in faults[0].needed
