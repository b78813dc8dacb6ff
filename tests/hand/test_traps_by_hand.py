"""Hand calculations of traps against published values, to the digits these are trusted to."""

from __future__ import annotations

import math
from pathlib import Path

import pytest

from driftwell.forms.body import Body
from driftwell.hand.ellipsoid import aspect_of, share_along
from driftwell.hand.kinds.brillouin_limit import brillouin_density
from driftwell.hand.kinds.penning_trap import radial_frequencies
from driftwell.hand.kinds.pseudopotential_limit import balanced_density, most_charges
from driftwell.hand.kinds.rf_trap import characteristic_exponent
from driftwell.hand.kinds.rigid_rotation import slow_rotation
from driftwell.hand.trap import Trap
from tests.hand.scenes import E, U, cloud, ions, one, scene
from tests.running import quantity

BALL = {"kind": "ball", "radius": "0.1 mm"}


@pytest.mark.parametrize(
    ("a", "q", "beta"),
    [
        (0.0, 0.05, 0.03537262626995655),
        (0.0, 0.3, 0.21605913494087922),
        (0.0, 0.6, 0.4622494625456103),
        (0.0, 0.9, 0.9159112672723058),
        (0.04, 0.0, 0.2),
    ],
)
def test_the_characteristic_exponent_is_that_of_mathieus_equation(
    a: float, q: float, beta: float
) -> None:
    """Computed by Floquet's theorem and Hill's determinant (McLachlan 1947); the last closed."""
    assert beta == pytest.approx(characteristic_exponent(a, q), rel=1e-7, abs=0.0)


def test_beyond_the_stable_region_nothing_is_held() -> None:
    """q_max = 0.9080463 at a = 0 (Abramowitz and Stegun, table 20.1)."""
    assert characteristic_exponent(0.0, 0.9080) is not None
    assert characteristic_exponent(0.0, 0.9081) is None


def test_a_hyperbolic_rf_trap_has_its_textbook_numbers(tmp_path: Path) -> None:
    """Wuerker, Shelton and Langmuir 1959: 150 u, r0 = 10 mm, 500 V, 1 MHz."""
    found = scene(
        tmp_path,
        species=ions(2.49080860338e-25),
        cloud=[cloud(BALL)],
        field=[
            {
                "name": "trap",
                "kind": "rf-quadrupole-3d",
                "radius": "10 mm",
                "voltage": {"amplitude": "500 V", "frequency": "1 MHz"},
            }
        ],
    )
    assert 0.3258669348192602 == pytest.approx(
        one(found, "Mathieu's q of ion along z").value, rel=1e-9, abs=0.0
    )
    secular = [one(found, f"secular frequency of ion along {axis}") for axis in "xz"]
    assert 57908.82784915049 == pytest.approx(secular[0].value, rel=1e-7, abs=0.0)
    assert 117752.66706434639 == pytest.approx(secular[1].value, rel=1e-7, abs=0.0)
    depth = one(found, "trap depth for ion along z")
    assert 20.366683426203767 == pytest.approx(depth.value, rel=1e-9, abs=0.0)
    assert depth.inside
    assert all(each.inside for each in secular)
    # the balance of an uneven well: D_z = q_z V/8 and k_z = 4 k_x
    density = one(found, "largest density of ion").value
    kz = 2.0 * depth.value * E / (2.49080860338e-25 * 0.5e-4)
    assert 8.8541878188e-12 * 2.49080860338e-25 * 1.5 * kz / E**2 == pytest.approx(
        density, rel=1e-9, abs=0.0
    )


def test_an_isotropic_well_holds_what_gauss_says() -> None:
    """R = (N k q^2/(m omega^2))^(1/3) and n = 3 eps0 m omega^2/q^2 (Dubin and O'Neil 1999)."""
    body, stiffness, radius = Body("ion", 100.0 * U, E), (2.0 * math.pi * 1e5) ** 2, 2e-3
    trap = Trap(body, (stiffness,) * 3, (0.0,) * 3, 0.0, (radius,) * 3, 0.0, ())
    expected = body.mass * stiffness * radius**3 / (8.9875517862e9 * E**2)
    most = most_charges(trap)
    assert most is not None
    assert expected == pytest.approx(most[0], rel=1e-8, abs=0.0)
    density = 3.0 * 8.8541878188e-12 * body.mass * stiffness / E**2
    assert density == pytest.approx(balanced_density(trap), rel=1e-9, abs=0.0)


def test_the_shares_of_a_spheroid_are_those_of_its_closed_form() -> None:
    assert 1.0 / 3.0 == pytest.approx(share_along(1.0), rel=1e-12, abs=0.0)
    assert 1.0 == pytest.approx(aspect_of(1.0 / 3.0), rel=1e-9, abs=0.0)
    # oblate and prolate shares in closed form (Kellogg 1929, from memory), aspects 1/2 and 2
    e = math.sqrt(0.75)
    flat = (1.0 - math.sqrt(1.0 - e**2) * math.asin(e) / e) / e**2
    long = (1.0 - e**2) / e**2 * (math.atanh(e) / e - 1.0)
    assert 0.5 == pytest.approx(aspect_of(flat), rel=1e-9, abs=0.0)
    assert 2.0 == pytest.approx(aspect_of(long), rel=1e-9, abs=0.0)


def test_rods_hold_a_line_of_charge(tmp_path: Path) -> None:
    """In a metre, pi eps0 m (k_x + k_y) r0^2/q^2: by Gauss's law for the cylinder."""
    rods = {
        "name": "rods",
        "kind": "rf-quadrupole",
        "radius": "3 mm",
        "voltage": {"amplitude": "100 V", "frequency": "2 MHz"},
    }
    found = scene(tmp_path, species=ions(100.0 * U), cloud=[cloud(BALL)], field=[rods])
    value = one(found, "most particles of ion in a metre")
    q = 2.0 * E * 100.0 / (100.0 * U * 9e-6 * (2 * math.pi * 2e6) ** 2)
    omega2 = q**2 / 8.0 * (2 * math.pi * 2e6) ** 2
    expected = math.pi * 8.8541878188e-12 * 100.0 * U * 2.0 * omega2 * 9e-6 / E**2
    assert expected == pytest.approx(value.value, rel=1e-9, abs=0.0)
    assert "1/m" == value.unit


def test_a_penning_trap_has_its_three_frequencies(tmp_path: Path) -> None:
    """Brown and Gabrielse 1986; V/d^2 = 4e5 V/m^2, 1.5 T, m = 6.6359e-26 kg."""
    f_z = 156406.71972508682
    found = scene(
        tmp_path,
        species=ions(6.6359e-26),
        cloud=[cloud(BALL)],
        field=[
            {"name": "magnet", "kind": "uniform-magnetic", "strength": "1.5 T"},
            {
                "name": "trap",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": quantity(f_z, "Hz")},
            },
        ],
    )
    for what, expected in (
        ("axial frequency of ion", f_z),
        ("modified cyclotron frequency of ion", 554331.9644666738),
        ("magnetron frequency of ion", 22065.3539244286),
    ):
        value = one(found, what)
        assert expected == pytest.approx(value.value, rel=1e-9, abs=0.0)
        assert value.inside
    cyclotron = one(found, "cyclotron frequency of cloud")
    assert 576397.3183911024 == pytest.approx(cyclotron.value, rel=1e-9, abs=0.0)
    assert radial_frequencies(1.0, 0.8) is None  # beyond 1/sqrt(2)


def test_the_brillouin_limit_and_the_rotation_in_balance_are_the_published_ones() -> None:
    """Beryllium ions in 4.5 T at 800 kHz, a sphere (Bollinger et al. 1993, formulas of RMP 71)."""
    mass, omega_c = 1.4965e-26, 2.0 * math.pi * 7667721.279876077
    assert 5990554738747077.0 == pytest.approx(brillouin_density(4.5, mass), rel=1e-9, abs=0.0)
    plasma = math.sqrt(3.0) * 2.0 * math.pi * 8e5
    rate = slow_rotation(omega_c, plasma)
    assert rate is not None
    assert 127314.07926109117 == pytest.approx(rate / (2.0 * math.pi), rel=1e-9, abs=0.0)
    # a long column of electrons: 1e12 1/m^3 in 0.01 T (Davidson 1990)
    electron = 9.1093837139e-31
    wide = math.sqrt(1e12 * E**2 / (8.8541878188e-12 * electron))
    turned = slow_rotation(E * 0.01 / electron, wide)
    assert turned is not None
    assert 144070.6043574024 == pytest.approx(turned / (2.0 * math.pi), rel=1e-9, abs=0.0)
    assert slow_rotation(1.0, 0.8) is None


def test_the_brillouin_limit_says_how_full_it_is_only_of_a_cloud_that_fills_a_volume(
    tmp_path: Path,
) -> None:
    magnet = {"name": "magnet", "kind": "uniform-magnetic", "strength": "1 T"}

    def why(count: int) -> str:
        load = cloud(BALL, count=count)
        return one(
            scene(tmp_path, species=ions(1e-25), cloud=[load], field=[magnet]), "largest density"
        ).why

    assert "no cloud of it" in why(1)
    assert "1/m^3 are there at the start, " in why(1000)


def test_a_string_has_its_length_scale_and_falls_out_of_range_when_it_would_fold(
    tmp_path: Path,
) -> None:
    """James 1998: m = 6.6359e-26 kg at 500 kHz, l = 7.06243 um."""

    def value(radial: str, count: int) -> tuple[float, bool]:
        rods = {
            "name": "rods",
            "kind": "rf-quadrupole",
            "radius": "0.5 mm",
            "voltage": {"amplitude": radial, "frequency": "20 MHz"},
        }
        caps = {
            "name": "caps",
            "kind": "static-quadrupole",
            "axial_frequency": {"species": "ion", "value": "500 kHz"},
        }
        shape = {"kind": "gaussian", "sigma": "5 um"}
        found = scene(
            tmp_path,
            species=ions(6.6359e-26),
            cloud=[cloud(shape, count=count)],
            field=[rods, caps],
        )
        made = one(found, "length scale of a string")
        return made.value, made.inside

    length, inside = value("300 V", 5)
    assert 7.062430792576768e-06 == pytest.approx(length, rel=1e-9, abs=0.0)
    assert inside
    assert not value("300 V", 40)[1]
