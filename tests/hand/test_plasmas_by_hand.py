"""Hand calculations of plasmas and of charges that fly apart, against published values."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from driftwell.hand.kinds.coulomb_explosion import ratio_at, time_to
from driftwell.hand.kinds.coupling import coupling
from driftwell.hand.kinds.debye_length import debye_length
from driftwell.hand.kinds.doppler_limit import doppler_temperature
from driftwell.hand.kinds.image_force import in_sphere
from driftwell.hand.kinds.nearest_neighbour import mean_distance
from driftwell.hand.kinds.pulse_spread import acceleration, rms_length
from tests.hand.scenes import E, cloud, ions, one, scene


def test_a_weakly_coupled_plasma_has_its_published_numbers() -> None:
    """n = 2.7108704711191527e13 1/m^3, Gamma = 0.1 at 8.0918 K (NRL formulas, computed)."""
    n, kelvin = 27108704711191.527, 8.091791850751408
    assert 0.1 == pytest.approx(coupling(n, kelvin, E), rel=1e-9, abs=0.0)
    assert 3.770279793926588e-05 == pytest.approx(debye_length(n, kelvin, E), rel=1e-9, abs=0.0)


def test_neighbours_are_at_hertzs_distance() -> None:
    """0.5539602783650904 n^(-1/3) (Chandrasekhar 1943, eq. 676)."""
    assert 0.5539602783650904e-5 == pytest.approx(mean_distance(1e15), rel=1e-12, abs=0.0)


def test_an_exploding_ball_doubles_in_the_time_of_its_closed_form(tmp_path: Path) -> None:
    """A million ions of 1.6605e-25 kg in 1 mm, by 20 000 of weight 50 (Kaplan et al. 2003)."""
    ball = {"kind": "ball", "radius": "1 mm"}
    found = scene(
        tmp_path,
        species=ions(1.6605e-25),
        cloud=[cloud(ball, count=20_000, weight=50)],
        coulomb={"softening": "20 um"},
    )
    value = one(found, "time of cloud")
    assert 1.3771052387309169e-06 == pytest.approx(value.value, rel=1e-9, abs=0.0)
    assert value.inside
    plasma = one(found, "plasma frequency").value
    assert 2041607.6484045924 == pytest.approx(2.0 * math.pi * plasma, rel=1e-9, abs=0.0)
    warm = scene(
        tmp_path,
        species=ions(1.6605e-25),
        cloud=[cloud(ball, count=20_000, weight=50, motion={"temperature": "2000 K"})],
        coulomb={"softening": "20 um"},
    )
    assert not one(warm, "time of cloud").inside


def test_the_size_of_an_exploding_ball_follows_from_the_time() -> None:
    """rms radius 1.5491933384829673 mm at 1 us is sqrt(3/5) of twice the radius then."""
    force = 8.9875517862e9 * 1e6 * E**2 / 1.6605e-25
    assert 2.8681211699968067e-06 == pytest.approx(time_to(4.0, 1e-3, force), rel=1e-9, abs=0.0)
    for time in (1e-9, 1e-7, 1e-6, 1e-4):
        ratio = ratio_at(time, 1e-3, force)
        assert time == pytest.approx(time_to(ratio, 1e-3, force), rel=1e-6, abs=0.0)


def test_a_flat_pulse_spreads_as_sheets_do() -> None:
    """A million charges over 5 mm radius, 1 mm long, 5 us (M4: Gauss's law, quadrature)."""
    push = acceleration(1e6 * E, math.pi * 25e-6, E / 1.6605e-25)
    assert 111150981.06731011 == pytest.approx(push, rel=1e-9, abs=0.0)
    even = rms_length(1e-3 / math.sqrt(12.0), push, 5e-6, gaussian=False)
    assert 0.001090838245093594 == pytest.approx(even, rel=1e-9, abs=0.0)
    gaussian = rms_length(3e-4, push, 5e-6, gaussian=True)
    assert 0.001097174712039863 == pytest.approx(gaussian, rel=1e-9, abs=0.0)


def test_images_pull_as_in_electrostatics() -> None:
    """In a sphere of 10 mm at 5 mm: 2.0507356006918713e-24 N (Jackson, sec. 2.2)."""
    assert 2.0507356006918713e-24 / E == pytest.approx(in_sphere(E, 0.01, 0.005), rel=1e-9, abs=0.0)


def test_the_doppler_limit_of_a_line_of_20_mhz_is_half_a_millikelvin() -> None:
    """hbar Gamma/(2 k) with CODATA 2022 constants: 0.4799243 mK for 20 MHz."""
    expected = 6.62607015e-34 * 20e6 / (2.0 * 1.380649e-23)
    assert expected == pytest.approx(doppler_temperature(20e6), rel=1e-9, abs=0.0)
