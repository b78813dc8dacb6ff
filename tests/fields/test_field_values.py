"""Fields against published closed forms, and against each other where two kinds say the same."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
import pytest
from scipy.integrate import solve_ivp
from scipy.linalg import expm

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import FieldForm
from driftwell.forms.body import Body
from tests.cases import field

ION = Body("ion", 6.6359e-26, ELEMENTARY_CHARGE)
BODIES = {"ion": ION, "electron": Body("electron", 9.1093837139e-31, -ELEMENTARY_CHARGE)}
RANDOM = np.random.default_rng(5).uniform(-3e-3, 3e-3, (20, 3))


def at(forms: FieldForm | Sequence[FieldForm], position: object, time: float = 0.0):
    forms = [forms] if isinstance(forms, FieldForm) else forms
    return evaluate(forms, BODIES, position, time)


def slope(forms: Sequence[FieldForm], time: float = 0.0) -> np.ndarray:
    """dE_i/dx_j at the origin of fields that are linear in the place."""
    return np.stack([at(forms, np.eye(3)[j], time).electric[0] for j in range(3)], axis=1)


def linear_motion(forms: Sequence[FieldForm], body: Body) -> np.ndarray:
    """The 6 x 6 matrix of d(x, v)/dt in static fields linear in the place."""
    b = at(forms, np.zeros(3)).magnetic[0]
    cross = np.array([[0.0, b[2], -b[1]], [-b[2], 0.0, b[0]], [b[1], -b[0], 0.0]])
    matrix = np.zeros((6, 6))
    matrix[:3, 3:] = np.eye(3)
    matrix[3:, :3] = body.charge_to_mass * slope(forms)
    matrix[3:, 3:] = body.charge_to_mass * cross
    return matrix


def mathieu_exponent(form: FieldForm, body: Body, axis: int, frequency: float) -> float:
    """Half the trace of the map over one drive period: cos(pi beta)."""

    def push(t: float, state: np.ndarray) -> np.ndarray:
        e = at(form, np.eye(3)[axis], t).electric[0, axis]
        return np.concatenate([state[2:], body.charge_to_mass * e * state[:2]])

    omega = 2.0 * math.pi * frequency
    start = np.array([1.0, 0.0, 0.0, omega])
    end = solve_ivp(push, (0.0, 1.0 / frequency), start, "DOP853", rtol=1e-12, atol=1e-12).y[:, -1]
    return 0.5 * (end[0] + end[3] / omega)


def penning(along: Sequence[float] = (0.0, 0.0, 1.0), ellipticity: float = 0.0) -> list[FieldForm]:
    """B = 1.5 T and V0/d^2 = 4.0e5 V/m^2."""
    return [
        field(
            "static-quadrupole",
            voltage="10 V",
            radius="7.0710678118654755 mm",
            half_length="5 mm",
            ellipticity=ellipticity,
        ),
        field("uniform-magnetic", strength="1.5 T", along=list(along)),
    ]


def frequencies(forms: Sequence[FieldForm]) -> np.ndarray:
    values = np.linalg.eigvals(linear_motion(forms, ION)).imag / (2.0 * math.pi)
    return np.sort(values[values > 0.0])


def test_penning_trap_has_its_three_eigenfrequencies() -> None:
    """omega_+- = (omega_c +- sqrt(omega_c^2 - 2 omega_z^2))/2; L. S. Brown, G. Gabrielse, Rev. Mod.
    Phys. 58 (1986) 233; values computed with mpmath from this formula."""
    expected = [22065.3539244286, 156406.71972508682, 554331.9644666738]
    assert expected == pytest.approx(frequencies(penning()), rel=1e-9, abs=0.0)


def test_charge_in_a_penning_trap_ends_where_the_closed_form_says() -> None:
    """State after 1 ms from x = 0.1 mm, z = 0.2 mm, v_y = 40 m/s; source as above."""
    start = np.array([1e-4, 0.0, 2e-4, 0.0, 40.0, 0.0])
    end = expm(linear_motion(penning(), ION) * 1e-3) @ start
    place = [0.00011438687621867457, -3.233110427168936e-05, -0.00016662113636388827]
    velocity = [42.39515644554482, -42.38851250617834, -108.71257917755578]
    assert place == pytest.approx(end[:3], abs=1e-11)
    assert velocity == pytest.approx(end[3:], abs=1e-5)


@pytest.mark.parametrize(
    ("tilt", "ellipticity"), [(0.0, 0.0), (2.0, 0.0), (0.0, 0.2), (3.0, -0.15)]
)
def test_tilt_and_ellipticity_leave_the_sum_of_squared_frequencies(
    tilt: float, ellipticity: float
) -> None:
    """The invariance theorem f_+^2 + f_z^2 + f_-^2 = f_c^2; L. S. Brown, G. Gabrielse, Phys. Rev. A
    25 (1982) 2423."""
    angle = math.radians(tilt)
    found = frequencies(penning((math.sin(angle), 0.0, math.cos(angle)), ellipticity))
    assert 576397.3183911024 == pytest.approx(math.sqrt(np.sum(found**2)), rel=1e-9, abs=0.0)
    moved = tilt != 0.0 or ellipticity != 0.0
    assert moved == bool(abs(found[0] / 22065.3539244286 - 1.0) > 1e-4)


def test_magnetron_frequency_of_an_elliptic_trap() -> None:
    """omega_-^2 with ellipticity: the roots of (w^2 + a)(w^2 + b) = w_c^2 w^2 with a, b =
    omega_z^2 (1 +- epsilon)/2, from the equations of motion (no source)."""
    omega_z, omega_c = 2 * math.pi * 156406.71972508682, 2 * math.pi * 576397.3183911024
    a, b = omega_z**2 * 1.2 / 2.0, omega_z**2 * 0.8 / 2.0
    squares = np.roots([1.0, a + b - omega_c**2, a * b])
    expected = np.sort(np.sqrt(squares)) / (2.0 * math.pi)
    assert expected == pytest.approx(
        frequencies(penning(ellipticity=0.2))[[0, 2]], rel=1e-9, abs=0.0
    )


def test_static_quadrupole_puts_its_voltage_between_end_caps_and_ring() -> None:
    form = field("static-quadrupole", voltage="10 V", radius="6 mm", half_length="3 mm")
    cap, ring = at(form, [[0, 0, 3e-3], [0, 6e-3, 0]]).potential
    assert 10.0 == pytest.approx(cap - ring, rel=1e-14, abs=0.0)


def test_axial_frequency_holds_charges_of_either_sign() -> None:
    for name, body in BODIES.items():
        form = field("static-quadrupole", axial_frequency={"species": name, "value": "80 kHz"})
        per_metre = slope([form])
        assert (2.0 * math.pi * 80e3) ** 2 == pytest.approx(
            -body.charge_to_mass * per_metre[2, 2], rel=1e-14, abs=0.0
        )
        assert (2.0 * math.pi * 80e3) ** 2 / 2.0 == pytest.approx(
            body.charge_to_mass * per_metre[0, 0], rel=1e-14, abs=0.0
        )


def test_paul_trap_has_its_secular_frequencies() -> None:
    """r0 = 10 mm, z0 = r0/sqrt(2), 500 V at 1 MHz, 150 u: q_z = 0.325867, beta_z = 0.235505, beta_r
    = 0.115818 from the characteristic exponent; R. F. Wuerker, H. Shelton, R. V. Langmuir, J. Appl.
    Phys. 30 (1959) 342; exponents computed by the Fourier matrix."""
    body = Body("molecule", 2.49080860338e-25, ELEMENTARY_CHARGE)
    form = field(
        "rf-quadrupole-3d",
        radius="10 mm",
        voltage={"amplitude": "500 V", "frequency": "1 MHz"},
    )
    q_z = 2.0 * body.charge_to_mass * slope([form])[2, 2] / (2.0 * math.pi * 1e6) ** 2
    assert 0.3258669348192602 == pytest.approx(q_z, rel=1e-9, abs=0.0)
    found = [math.acos(mathieu_exponent(form, body, axis, 1e6)) / math.pi for axis in (0, 1, 2)]
    beta_r, beta_z = 0.11581765569830098, 0.2355053341286928
    assert [beta_r, beta_r, beta_z] == pytest.approx(found, rel=1e-8, abs=0.0)


def test_3d_quadrupole_puts_its_voltage_between_ring_and_end_caps() -> None:
    form = field("rf-quadrupole-3d", radius="10 mm", half_length="6 mm", voltage="500 V")
    ring, cap, centre = at(form, [[0, 10e-3, 0], [0, 0, -6e-3], [0, 0, 0]]).potential
    assert 500.0 == pytest.approx(ring - cap, rel=1e-14, abs=0.0)
    assert centre == 0.0


def rods(q: float) -> FieldForm:
    """Rods that give ION the Mathieu parameter q at 1 MHz."""
    volts = q * (2.0 * math.pi * 1e6) ** 2 * 4e-3**2 / (2.0 * ION.charge_to_mass)
    return field(
        "rf-quadrupole",
        radius="4 mm",
        voltage={"amplitude": f"{volts!r} V", "frequency": "1 MHz"},
    )


@pytest.mark.parametrize(
    ("q", "beta"),
    [(0.1, 0.07084955253163007), (0.4, 0.2925662114803347), (0.9, 0.9159112672723058)],
)
def test_linear_rf_quadrupole_has_the_mathieu_exponent(q: float, beta: float) -> None:
    """N. W. McLachlan, Theory and Application of Mathieu Functions (1947); values computed by the
    Floquet map and by Hill's determinant."""
    for axis in (0, 1):
        found = math.acos(mathieu_exponent(rods(q), ION, axis, 1e6)) / math.pi
        assert beta == pytest.approx(found, rel=1e-7, abs=0.0)


def test_linear_rf_quadrupole_loses_charges_above_q_of_0_908() -> None:
    """The first stability limit b1(q) = 0 at q = 0.908046; M. Abramowitz, I. Stegun, Handbook of
    Mathematical Functions, ch. 20."""
    assert abs(mathieu_exponent(rods(0.906), ION, 0, 1e6)) < 1.0
    assert abs(mathieu_exponent(rods(0.910), ION, 0, 1e6)) > 1.0


def test_quadro_logarithmic_well_has_its_three_frequencies() -> None:
    """k = 3.0e7 V/m^2, Rm = 20 mm, circular orbit at 9 mm, 8.6e-25 kg: omega_z = sqrt(k q/m),
    omega_z sqrt((Rm^2/R^2 - 1)/2), omega_z sqrt(Rm^2/R^2 - 2); R. D. Knight, Appl. Phys. Lett. 38
    (1981) 221; values computed from these formulas."""
    form = field("quadro-logarithmic", curvature="3.0e7 V/m^2", characteristic_radius="20 mm")
    ratio, radius = ELEMENTARY_CHARGE / 8.6e-25, 9e-3
    electric = at(form, [[radius, 0, 1e-3], [0, -radius, 5e-3]]).electric
    axial = np.sqrt(-ratio * electric[:, 2] / [1e-3, 5e-3])
    assert [376258.8556027039] * 2 == pytest.approx(axial / (2.0 * math.pi), rel=1e-10, abs=0.0)
    turning = math.sqrt(-ratio * electric[0, 0] / radius)
    assert 527988.622958975 == pytest.approx(turning / (2.0 * math.pi), rel=1e-10, abs=0.0)
    assert 29857.053223204326 == pytest.approx(radius * turning, rel=1e-10, abs=0.0)
    step = 1e-6
    beyond, before = at(form, [[radius + step, 0, 0], [radius - step, 0, 0]]).electric[:, 0]
    radial = math.sqrt(3.0 * turning**2 - ratio * (beyond - before) / (2.0 * step))
    assert 644959.8790070378 == pytest.approx(radial / (2.0 * math.pi), rel=1e-6, abs=0.0)


def test_quadro_logarithmic_well_has_no_radial_field_at_its_characteristic_radius() -> None:
    form = field("quadro-logarithmic", curvature="3.0e7 V/m^2", characteristic_radius="20 mm")
    values = at(form, [[0.02, 0, 0], [0.01, 0, 0]])
    assert 0.0 == pytest.approx(values.electric[0, 0], abs=1e-8)
    assert values.electric[1, 0] < 0.0
    assert -0.5 * 3.0e7 * 0.02**2 / 2.0 == pytest.approx(values.potential[0], rel=1e-12, abs=0.0)


def test_wire_is_at_its_voltage_and_the_cylinder_at_zero() -> None:
    """E = V / (r ln(R/a)): Gauss's law for a line charge (common practice, no source)."""
    form = field("wire-in-cylinder", wire_radius="50 um", cylinder_radius="10 mm", voltage="-300 V")
    values = at(form, [[50e-6, 0, 0], [0, 10e-3, 1.0], [0, 2e-3, 0]])
    assert [-300.0, 0.0] == pytest.approx(values.potential[:2], rel=1e-12, abs=1e-10)
    assert -300.0 / (2e-3 * math.log(200.0)) == pytest.approx(
        values.electric[2, 1], rel=1e-12, abs=0.0
    )


@pytest.mark.parametrize(
    "form",
    [
        field("quadro-logarithmic", curvature="3.0e7 V/m^2", characteristic_radius="20 mm"),
        field("wire-in-cylinder", wire_radius="1 mm", cylinder_radius="10 mm", voltage="1 V"),
    ],
    ids=lambda form: form.kind,
)
def test_a_charge_on_the_axis_of_a_logarithm_gets_no_number(form: FieldForm) -> None:
    values = at(form, [[0.0, 0.0, 1e-3]])
    assert np.all(np.isnan(values.electric[0, :2]))
    assert not np.isfinite(values.potential[0])


def test_electric_dipole_is_a_uniform_field() -> None:
    dipole = at(field("electric-multipole", order=1, radius="4 mm", voltage="50 V"), RANDOM)
    uniform = at(field("uniform-electric", strength="12.5 kV/m", along=[-1, 0, 0]), RANDOM)
    assert uniform.potential == pytest.approx(dipole.potential, rel=1e-12, abs=0.0)
    assert uniform.electric == pytest.approx(dipole.electric, rel=1e-12, abs=0.0)


def test_electric_quadrupole_is_the_rods_with_twice_the_voltage_between_them() -> None:
    poles = at(field("electric-multipole", order=2, radius="4 mm", voltage="50 V"), RANDOM)
    rods = at(field("rf-quadrupole", radius="4 mm", voltage="100 V"), RANDOM)
    assert rods.potential == pytest.approx(poles.potential, rel=1e-10, abs=1e-12)
    assert rods.electric == pytest.approx(poles.electric, rel=1e-12, abs=0.0)


@pytest.mark.parametrize("order", [1, 2, 3, 5, 12])
def test_electric_multipole_alternates_between_its_poles(order: int) -> None:
    """phi = V (r/r0)^n cos(n (theta - alpha)) (common practice, no source)."""
    form = field("electric-multipole", order=order, radius="4 mm", voltage="50 V", angle="0.3 rad")
    theta = 0.3 + np.arange(2 * order) * math.pi / order
    circle = 4e-3 * np.stack([np.cos(theta), np.sin(theta), 0.0 * theta], axis=1)
    values = at(form, circle)
    assert [50.0, -50.0] * order == pytest.approx(values.potential, rel=1e-12, abs=0.0)
    outwards = np.sum(values.electric * circle, axis=1) / 4e-3
    assert [-50.0 * order / 4e-3, 50.0 * order / 4e-3] * order == pytest.approx(
        outwards, rel=1e-12, abs=0.0
    )
    half = at(form, 0.5 * circle).potential
    assert values.potential / 2.0**order == pytest.approx(half, rel=1e-12, abs=0.0)


def test_magnetic_dipole_is_a_uniform_field() -> None:
    dipole = field("magnetic-multipole", order=1, radius="20 mm", strength="0.3 T", angle="30 deg")
    along = [-math.sin(math.pi / 6.0), math.cos(math.pi / 6.0), 0.0]
    uniform = field("uniform-magnetic", strength="0.3 T", along=along)
    assert at(uniform, RANDOM).magnetic == pytest.approx(
        at(dipole, RANDOM).magnetic, rel=1e-12, abs=0.0
    )


def test_normal_magnetic_multipoles_have_their_textbook_fields() -> None:
    """Quadrupole B = g (y, x); sextupole B = (s/2) (2 x y, x^2 - y^2) with s = 2 B0/r0^2; H.
    Wiedemann, Particle Accelerator Physics, 4th ed. (2015), sec. 3.3 (from memory)."""
    x, y, zero = RANDOM[:, 0], RANDOM[:, 1], np.zeros(20)
    by_gradient = field("magnetic-multipole", order=2, radius="20 mm", gradient="12 T/m")
    by_strength = field("magnetic-multipole", order=2, radius="20 mm", strength="0.24 T")
    expected = 12.0 * np.stack([y, x, zero], axis=1)
    assert expected == pytest.approx(at(by_gradient, RANDOM).magnetic, rel=1e-12, abs=0.0)
    assert expected == pytest.approx(at(by_strength, RANDOM).magnetic, rel=1e-12, abs=0.0)
    sextupole = field("magnetic-multipole", order=3, radius="20 mm", strength="0.24 T")
    expected = 0.24 / 0.02**2 * np.stack([2.0 * x * y, x**2 - y**2, zero], axis=1)
    assert expected == pytest.approx(at(sextupole, RANDOM).magnetic, rel=1e-10, abs=0.0)


def test_skew_quadrupole_is_the_normal_one_turned_by_45_degrees() -> None:
    """B = g (x, -y) up to sign; source as above."""
    skew = field("magnetic-multipole", order=2, radius="20 mm", gradient="12 T/m", angle="45 deg")
    x, y, zero = RANDOM[:, 0], RANDOM[:, 1], np.zeros(20)
    found = at(skew, RANDOM).magnetic
    assert 12.0 * np.stack([-x, y, zero], axis=1) == pytest.approx(found, abs=1e-15)


def test_growing_solenoid_field_induces_circles_about_its_centre() -> None:
    """E_theta = -(r/2) dB/dt, Faraday's law on a circle (common practice, no source)."""
    form = field(
        "uniform-magnetic",
        strength={"kind": "ramp", "before": "0 T", "after": "2 T", "start": "0 s", "end": "1 ms"},
        centre=["1 mm", "0 mm", "0 mm"],
    )
    values = at(form, [[3e-3, 0, 0], [1e-3, -2e-3, 7e-3]], 0.5e-3)
    assert [[0.0, 0.0, 1.0]] * 2 == pytest.approx(values.magnetic)
    assert np.array([[0.0, -2.0, 0.0], [-2.0, 0.0, 0.0]]) == pytest.approx(values.electric)


def test_uniform_field_points_along_its_direction_whatever_its_length() -> None:
    form = field("uniform-electric", strength="100 V/m", along=[0, 3, -4])
    values = at(form, [[0, 0, 0], [0, 1.0, 0]])
    assert np.array([[0.0, 60.0, -80.0]] * 2) == pytest.approx(values.electric)
    assert [0.0, -60.0] == pytest.approx(values.potential)
