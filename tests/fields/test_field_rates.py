"""The rates of motion that the automatic step choice is made from."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, ELEMENTARY_CHARGE
from driftwell.fields.evaluation import evaluate
from driftwell.forms.body import Body
from tests.cases import field

TURN = 2.0 * math.pi
ION = Body("ion", 6.6359e-26, ELEMENTARY_CHARGE)
ANTI_ION = Body("anti-ion", 6.6359e-26, -ELEMENTARY_CHARGE)
BODIES = {"ion": ION, "anti-ion": ANTI_ION}


def hertz(form, body: Body = ION) -> dict[str, float]:
    return {name: rate / TURN for name, rate in form.rates(body, BODIES).items()}


def test_static_quadrupole_gives_its_axial_frequency() -> None:
    """156406.72 Hz for V0/d^2 = 4.0e5 V/m^2; L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986)
    233."""
    form = field(
        "static-quadrupole", voltage="10 V", radius="7.0710678118654755 mm", half_length="5 mm"
    )
    expected = {"axial": 156406.71972508682, "radial": 156406.71972508682 / math.sqrt(2.0)}
    assert expected == pytest.approx(hertz(form), rel=1e-9, abs=0.0)


def test_axial_frequency_is_that_of_the_species_named_and_scales_to_others() -> None:
    form = field("static-quadrupole", axial_frequency={"species": "anti-ion", "value": "80 kHz"})
    assert 80e3 == pytest.approx(hertz(form, ANTI_ION)["axial"], rel=1e-12, abs=0.0)
    heavy = Body("heavy", 4.0 * ION.mass, -ION.charge)
    assert 40e3 == pytest.approx(hertz(form, heavy)["axial"], rel=1e-12, abs=0.0)


def test_uniform_magnetic_field_gives_the_cyclotron_frequency_at_its_strongest() -> None:
    """576397.32 Hz at 1.5 T; source as above."""
    form = field(
        "uniform-magnetic",
        strength={"kind": "step", "before": "0.5 T", "after": "-1.5 T", "at": "1 ms"},
    )
    assert {"cyclotron": 576397.3183911024} == pytest.approx(
        hertz(form, ANTI_ION), rel=1e-9, abs=0.0
    )


def test_3d_rf_quadrupole_gives_drive_and_secular_frequencies() -> None:
    """Exact 117752.67 Hz (z) and 57908.83 Hz (r) from the Mathieu exponent, q_z = 0.326; the
    approximation of H. G. Dehmelt, Adv. At. Mol. Phys. 3 (1967) 53, gives 115211.36 Hz."""
    body = Body("molecule", 2.49080860338e-25, ELEMENTARY_CHARGE)
    form = field(
        "rf-quadrupole-3d", radius="10 mm", voltage={"amplitude": "500 V", "frequency": "1 MHz"}
    )
    found = hertz(form, body)
    assert 1e6 == pytest.approx(found["drive"], rel=1e-12, abs=0.0)
    assert 115211.35968758678 == pytest.approx(found["axial"], rel=1e-9, abs=0.0)
    assert 117752.66706434639 == pytest.approx(found["axial"], rel=0.03, abs=0.0)
    assert 57908.82784915049 == pytest.approx(found["radial"], rel=0.03, abs=0.0)


def rods(volts: float, frequency: str, offset: float = 0.0) -> dict[str, float]:
    voltage = {"amplitude": f"{volts} V", "offset": f"{offset} V", "frequency": frequency}
    return hertz(field("rf-quadrupole", radius="4 mm", voltage=voltage))


def test_secular_frequency_of_rods_is_proportional_to_the_voltage() -> None:
    """omega = |Q| V / (sqrt(2) m r0^2 Omega); W. Paul, Rev. Mod. Phys. 62 (1990) 531."""
    expected = ION.charge_to_mass * 50.0 / (math.sqrt(2.0) * 4e-3**2 * TURN * 1e6) / TURN
    assert expected == pytest.approx(rods(50.0, "1 MHz")["secular"], rel=1e-12, abs=0.0)
    assert 2.0 * expected == pytest.approx(rods(100.0, "1 MHz")["secular"], rel=1e-12, abs=0.0)


def test_a_slow_drive_is_followed_as_the_static_field_of_its_crest() -> None:
    """Not at the far too high rate that the formula for fast drives would give."""
    static = hertz(field("rf-quadrupole", radius="4 mm", voltage="50 V"))["radial"]
    assert static == pytest.approx(rods(50.0, "50 Hz")["secular"], rel=1e-12, abs=0.0)


def test_a_ripple_on_a_static_voltage_keeps_the_static_rate() -> None:
    static = hertz(field("rf-quadrupole", radius="4 mm", voltage="50 V"))["radial"]
    assert static == pytest.approx(rods(0.5, "10 MHz", offset=50.0)["secular"], rel=1e-3, abs=0.0)


def test_electric_quadrupole_by_poles_moves_as_the_rods() -> None:
    poles = hertz(field("electric-multipole", order=2, radius="4 mm", voltage="25 V"))
    static = hertz(field("rf-quadrupole", radius="4 mm", voltage="50 V"))
    assert static == pytest.approx(poles, rel=1e-12, abs=0.0)


def test_dipoles_do_not_bind() -> None:
    assert {} == hertz(field("electric-multipole", order=1, radius="4 mm", voltage="25 V"))
    assert {} == hertz(field("uniform-electric", strength="1 kV/m"))
    driven = field("uniform-electric", strength={"amplitude": "1 V/m", "frequency": "3 MHz"})
    assert {"drive": 3e6} == pytest.approx(hertz(driven))


def test_magnetic_multipole_gives_the_cyclotron_frequency_at_its_poles() -> None:
    by_strength = field("magnetic-multipole", order=2, radius="20 mm", strength="0.3 T")
    by_gradient = field("magnetic-multipole", order=2, radius="20 mm", gradient="15 T/m")
    assert {"cyclotron": 576397.3183911024 / 5.0} == pytest.approx(
        hertz(by_strength), rel=1e-9, abs=0.0
    )
    assert hertz(by_strength) == pytest.approx(hertz(by_gradient), rel=1e-12, abs=0.0)


def test_quadro_logarithmic_well_gives_axial_and_radial_rates_of_a_usual_orbit() -> None:
    """376258.86 Hz axial, 644959.88 Hz radial at 9 mm of Rm = 20 mm (the rate taken is that of an
    orbit at 8.2 mm, 17 % higher); R. D. Knight, Appl. Phys. Lett. 38 (1981) 221."""
    form = field("quadro-logarithmic", curvature="3.0e7 V/m^2", characteristic_radius="20 mm")
    found = hertz(form, Body("peptide", 8.6e-25, ELEMENTARY_CHARGE))
    assert 376258.8556027039 == pytest.approx(found["axial"], rel=1e-9, abs=0.0)
    assert 644959.8790070378 == pytest.approx(found["radial"], rel=0.2, abs=0.0)


def test_wire_gives_the_rate_of_the_orbit_at_its_surface() -> None:
    """m v^2 = |q V| / ln(R/a) on any circular orbit (common practice, no source)."""
    body = Body("potassium", 38.963 * ATOMIC_MASS, ELEMENTARY_CHARGE)
    form = field("wire-in-cylinder", wire_radius="50 um", cylinder_radius="10 mm", voltage="-300 V")
    speed = math.sqrt(300.0 * body.charge_to_mass / math.log(200.0))
    assert {"radial": speed / 50e-6} == pytest.approx(form.rates(body, BODIES), rel=1e-12, abs=0.0)


def test_gap_gives_the_rate_of_a_crossing_from_rest() -> None:
    """Uniform acceleration: d = a T^2 / 2; 533.18 ps for an electron, 5 mm and 1 kV, by hand."""
    body = Body("electron", ELECTRON_MASS, -ELEMENTARY_CHARGE)
    form = field("gridded-gap", voltage="1 kV", length="5 mm")
    assert {"crossing": 1.0 / 533.18e-12} == pytest.approx(hertz(form, body), rel=1e-4, abs=0.0)
    driven = field(
        "gridded-gap", voltage={"amplitude": "1 kV", "frequency": "3 MHz"}, length="5 mm"
    )
    assert {"crossing": hertz(form, body)["crossing"], "drive": 3e6} == pytest.approx(
        hertz(driven, body), rel=1e-12, abs=0.0
    )


def cyclotron(tesla: float) -> float:
    """Hz, of ION."""
    return ION.charge_to_mass * tesla / TURN


def field_at(form, place: list[float]) -> float:
    found = evaluate([form], BODIES, [place], 0.0).magnetic[0]
    return float(np.sqrt(found @ found))


@pytest.mark.parametrize(
    ("form", "place", "tolerance"),
    [
        (field("current-loop", radius="50 mm", current="10 A", turns=30), [0, 0, 0], 1e-12),
        (
            field(
                "solenoid",
                radius="20 mm",
                length="50 mm",
                thickness="9 mm",
                current="10 A",
                turns=30,
            ),
            [0, 0, 0],
            1e-12,
        ),
        (
            field(
                "magnet-block",
                size=["20 mm", "10 mm", "5 mm"],
                remanence="1.2 T",
                magnetised_along=[1, 0, 0],
                clearance="3 mm",
            ),
            [0.013, 0, 0],
            1e-12,
        ),
        (
            field(
                "magnet-cylinder",
                radius="5 mm",
                length="10 mm",
                remanence="1.2 T",
                clearance="3 mm",
            ),
            [0, 0, 0.008],
            1e-12,
        ),
        (
            field(
                "magnet-cylinder",
                radius="5 mm",
                length="80 mm",
                remanence="1.2 T",
                magnetised_along=[0, 1, 0],
                clearance="1 mm",
            ),
            [0, 0.006, 0],
            0.02,
        ),
        (
            field(
                "multipole-magnet",
                order=1,
                radius="20 mm",
                strength="0.3 T",
                length="50 mm",
                edge="20 mm",
            ),
            [0, 0, 0],
            1e-12,
        ),
    ],
    ids=["loop", "solenoid", "block", "rod", "rod across", "dipole"],
)
def test_magnets_give_the_cyclotron_frequency_of_the_place_they_state(
    form, place: list[float], tolerance: float
) -> None:
    """In the middle of coils, before the face of magnets: as the kernel has it there."""
    expected = cyclotron(field_at(form, place))
    assert {"cyclotron": expected} == pytest.approx(hertz(form), rel=tolerance, abs=0.0)
    assert expected == pytest.approx(cyclotron(form.strongest()), rel=tolerance, abs=0.0)


def test_alternating_coil_gives_its_drive_too() -> None:
    form = field(
        "current-loop", radius="50 mm", current={"amplitude": "10 A", "frequency": "2 kHz"}
    )
    assert 2000.0 == pytest.approx(hertz(form)["drive"], rel=1e-12, abs=0.0)
