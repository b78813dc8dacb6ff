"""Loops and solenoids against closed forms, and against each other."""

from __future__ import annotations

import math

import mpmath
import numpy as np
import pytest

from driftwell.constants import MAGNETIC_CONSTANT
from driftwell.fields.evaluation import evaluate
from driftwell.fields.form import FieldForm
from tests.cases import BODIES, field
from tests.moving import ION_RATIO, always, ions, loop


def magnetic(forms: FieldForm | list[FieldForm], position: object) -> np.ndarray:
    return evaluate(forms if isinstance(forms, list) else [forms], BODIES, position, 0.0).magnetic


def potential(kind: str, position: object, **keys: object) -> np.ndarray:
    """A, T m, of a coil with 1 A: what it induces while its current falls by 1 A in a second."""
    falling = {"kind": "ramp", "before": "1 A", "after": "0 A", "start": "0 s", "end": "1 s"}
    form = field(kind, current=falling, **keys)
    return evaluate([form], BODIES, position, 0.5).electric


def test_current_loop_has_its_field_off_the_axis() -> None:
    """a = 50 mm, 10 A; W. R. Smythe, Static and Dynamic Electricity, sec. 7.10; values computed
    with mpmath, one of them by the law of Biot and Savart as well. They were computed with mu0 of
    12 digits."""
    form = field("current-loop", radius="50 mm", current="10 A")
    places = [[0, 0, 0], [0, 0, 0.05], [0.02, 0, 0.03], [0.06, 0, 0.01], [0.045, 0, 0.002]]
    expected = [
        [0.0, 0.0, 0.000125663706127],
        [0.0, 0.0, 4.44288293757176e-05],
        [2.2604994184189908e-05, 0.0, 7.595437492893882e-05],
        [8.540352832439128e-05, 0.0, -4.877287459169346e-05],
        [0.00014299167240109832, 0.0, 0.00043356349650062066],
    ]
    assert np.array(expected) == pytest.approx(magnetic(form, places), rel=1e-11, abs=1e-20)


def test_current_loop_agrees_with_the_textbook_from_the_axis_to_far_away() -> None:
    """J. D. Jackson, Classical Electrodynamics, 3rd ed., sec. 5.5 (from memory), in mpmath with
    60 digits, which its own cancellation needs: 1e-6 to 1000 radii from the centre."""
    radius = 0.05
    form = field("current-loop", radius="50 mm", current="10 A")
    random = np.random.default_rng(4)
    for rho, z in radius * 10.0 ** random.uniform(-6.0, 3.0, (60, 2)):
        with mpmath.workdps(60):
            a, r, h = map(mpmath.mpf, (radius, float(rho), float(z)))
            s2, d = (a + r) ** 2 + h * h, (a - r) ** 2 + h * h
            k, e = mpmath.ellipk(4 * a * r / s2), mpmath.ellipe(4 * a * r / s2)
            unit = MAGNETIC_CONSTANT * 10 / (2 * mpmath.pi * mpmath.sqrt(s2))
            b_rho = unit * h / r * (-k + (a * a + r * r + h * h) / d * e)
            b_z = unit * (k + (a * a - r * r - h * h) / d * e)
            size = float(mpmath.hypot(b_rho, b_z))
        found = magnetic(form, [[rho, 0.0, z]])[0]
        assert [float(b_rho), 0.0, float(b_z)] == pytest.approx(found, abs=3e-14 * size)


def test_current_loop_is_a_dipole_far_away() -> None:
    """B = mu0/(4 pi) (3 n (n.m) - m)/r^3, m = N I pi a^2; Jackson, sec. 5.6 (from memory). The
    next term is (a/r)^2 smaller."""
    form = field("current-loop", radius="1 mm", current="2 A", turns=5, along=[1, 2, -2])
    moment = 10.0 * math.pi * 1e-6 * np.array([1.0, 2.0, -2.0]) / 3.0
    place = np.array([0.3, -1.1, 0.5])
    distance = math.sqrt(place @ place)
    n = place / distance
    dipole = 1e-7 * (3.0 * n * (n @ moment) - moment) / distance**3
    found = magnetic(form, [place])[0]
    assert dipole == pytest.approx(found, abs=5e-6 * np.abs(dipole).max())


def helmholtz() -> list[FieldForm]:
    keys = {"radius": "100 mm", "current": "10 A", "turns": 10}
    return [
        field("current-loop", name=str(z), centre=["0 mm", "0 mm", f"{z} mm"], **keys)
        for z in (-50, 50)
    ]


def test_helmholtz_pair_is_flat_in_its_middle_on_and_off_the_axis() -> None:
    """R = 0.1 m, 100 A turns: centre (4/5)^1.5 mu0 N I/R; Jackson, problem 5.7; values computed
    with mpmath."""
    found = magnetic(helmholtz(), [[0, 0, 0], [0, 0, 0.02], [0.03, 0, 0.02]])
    assert 0.0008991762854544922 == pytest.approx(found[0, 2], rel=1e-10, abs=0.0)
    assert 0.9982365015789347 == pytest.approx(found[1, 2] / found[0, 2], rel=1e-10, abs=0.0)
    expected = [-2.913797163168558e-06, 0.0, 0.0009062133371440081]
    assert expected == pytest.approx(found[2], rel=1e-10, abs=1e-16)
    quartic = 1.0 - 144.0 / 125.0 * 0.05**4
    slightly = magnetic(helmholtz(), [[0, 0, 0.005]])[0, 2] / found[0, 2]
    assert 1.0 - quartic == pytest.approx(1.0 - slightly, rel=0.01, abs=0.0)


SOLENOID = {"radius": "20 mm", "length": "100 mm"}


def test_solenoid_has_its_closed_form_on_the_axis() -> None:
    """B = (mu0 N I/(2 L)) (cos of the angle to one end + that to the other); Jackson, problem 5.3
    (from memory)."""
    form = field("solenoid", current="5 A", turns=200, **SOLENOID)
    z = np.array([0.0, 0.03, 0.05, -0.08, 0.4])
    ends = [(z + h) / np.hypot(0.02, z + h) for h in (0.05, -0.05)]
    expected = 0.5 * MAGNETIC_CONSTANT * 200 * 5.0 / 0.1 * (ends[0] - ends[1])
    found = magnetic(form, np.stack([0 * z, 0 * z, z], axis=1))
    assert expected == pytest.approx(found[:, 2], rel=1e-15, abs=1e-15 * expected[0])
    assert np.all(found[:, :2] == 0.0)


OFF_AXIS = [[0.005, 0, 0.0], [0.015, 0, 0.03], [0.019, 0, 0.049], [0.0, 0.025, 0.06], [0.1, 0, 0.2]]


def test_solenoid_is_a_fine_stack_of_loops() -> None:
    """40 loops at the places of Gauss and Legendre's rule in each twentieth of the length; the
    nearest place is 1 mm from the sheet, a fifth of a twentieth: good to 1.48^-80 = 3e-14."""
    form = field("solenoid", current="1 A", turns=100, **SOLENOID)
    places, weights = np.polynomial.legendre.leggauss(40)
    thin = field("current-loop", radius="20 mm", current="1 A")
    total = np.zeros((len(OFF_AXIS), 3))
    for middle in np.arange(-0.0475, 0.05, 0.005):
        for u, w in zip(places, weights, strict=True):
            shifted = np.array(OFF_AXIS, dtype=float) - [0.0, 0.0, middle + 0.0025 * u]
            total += 1000.0 * 0.0025 * w * magnetic(thin, shifted)
    found = magnetic(form, OFF_AXIS)
    assert total == pytest.approx(found, rel=1e-12, abs=1e-13 * np.abs(found).max())


@pytest.mark.parametrize(("rho", "z"), [(1e-6, 0.01), (0.004, 0.03), (0.019, 0.05), (0.3, 0.1)])
def test_solenoid_has_the_published_vector_potential(rho: float, z: float) -> None:
    """E. E. Callaghan, S. H. Maslen, NASA TN D-465 (1960) (from memory), in mpmath: A_phi =
    (mu0 j/(4 pi)) sqrt(a/rho) [zeta k ((k^2 + h^2 - h^2 k^2)/(h^2 k^2) K - E/k^2
    + (h^2 - 1)/h^2 Pi)], taken from end to end."""
    found = potential("solenoid", [[rho, 0.0, z]], turns=100, **SOLENOID)[0]
    with mpmath.workdps(60):
        a, r = mpmath.mpf(0.02), mpmath.mpf(rho)
        ends = []
        for zeta in (mpmath.mpf(z) + mpmath.mpf(0.05), mpmath.mpf(z) - mpmath.mpf(0.05)):
            h2 = 4 * a * r / (a + r) ** 2
            k2 = 4 * a * r / ((a + r) ** 2 + zeta**2)
            k, e, pi = mpmath.ellipk(k2), mpmath.ellipe(k2), mpmath.ellippi(h2, k2)
            bracket = (k2 + h2 - h2 * k2) / (h2 * k2) * k - e / k2 + (h2 - 1) / h2 * pi
            ends.append(zeta * mpmath.sqrt(k2) * bracket)
        scale = MAGNETIC_CONSTANT * 1000 / (2 * mpmath.pi) * mpmath.sqrt(a / r)
        expected = float(scale * (ends[0] - ends[1]))
    assert [0.0, expected, 0.0] == pytest.approx(found, rel=1e-12, abs=1e-30)


def test_loop_has_the_vector_potential_of_the_textbook() -> None:
    """A_phi = (mu0 I/(pi k)) sqrt(a/rho) ((1 - k^2/2) K - E); Smythe, sec. 7.10 (from memory)."""
    found = potential("current-loop", [[0.0, 0.03, 0.01]], radius="50 mm")[0]
    with mpmath.workdps(30):
        m = 4 * mpmath.mpf("0.05") * mpmath.mpf("0.03") / (mpmath.mpf("0.08") ** 2 + 0.0001)
        value = (1 - m / 2) * mpmath.ellipk(m) - mpmath.ellipe(m)
        expected = float(MAGNETIC_CONSTANT / mpmath.pi * mpmath.sqrt(0.05 / 0.03 / m) * value)
    assert [-expected, 0.0, 0.0] == pytest.approx(found, rel=1e-13, abs=1e-30)


def test_thick_solenoid_has_its_closed_form_on_the_axis() -> None:
    """B = (mu0 j/2) [zeta ln((r2 + hypot(r2, zeta))/(r1 + hypot(r1, zeta)))] from end to end, j in
    A/m^2; D. B. Montgomery, Solenoid Magnet Design (1969), ch. 1 (from memory)."""
    form = field("solenoid", current="1 A", turns=300, thickness="10 mm", **SOLENOID)
    z = np.array([0.0, 0.03, 0.05, 0.2])
    density = 300.0 / (0.1 * 0.01)

    def end(zeta: np.ndarray) -> np.ndarray:
        return zeta * np.log((0.03 + np.hypot(0.03, zeta)) / (0.02 + np.hypot(0.02, zeta)))

    expected = 0.5 * MAGNETIC_CONSTANT * density * (end(z + 0.05) - end(z - 0.05))
    found = magnetic(form, np.stack([0 * z, 0 * z, z], axis=1))[:, 2]
    assert expected == pytest.approx(found, rel=1e-14, abs=1e-14 * expected[0])


def test_thick_solenoid_loses_digits_only_close_to_its_winding() -> None:
    """Before its end, 12 sheets against 64: what docs/numerics/magnets.md states."""
    keys = {"current": "1 A", "turns": 300, "thickness": "10 mm", **SOLENOID}
    usual, fine = field("solenoid", **keys), field("solenoid", sheets=64, **keys)
    gaps = np.array([3e-3, 1e-3, 0.1e-3])
    places = np.stack([0.02 - gaps, 0 * gaps, 0 * gaps + 0.05], axis=1)
    error = np.abs(magnetic(usual, places) - magnetic(fine, places)).max(axis=1)
    parts = error / magnetic(fine, [[0, 0, 0]])[0, 2]
    assert parts[0] < 1e-12
    assert 1e-11 < parts[1] < 1e-8
    assert 1e-6 < parts[2] < 1e-3


def test_flat_coil_is_loops_side_by_side() -> None:
    """A thick winding of hardly any length, against loops at the same radii."""
    form = field(
        "solenoid", radius="10 mm", thickness="20 mm", length="1 nm", current="1 A", turns=40
    )
    places, weights = np.polynomial.legendre.leggauss(12)
    at = [[0.004, 0.003, 0.01], [0.02, 0.0, 0.015], [0.05, 0.01, -0.02]]
    total = np.zeros((3, 3))
    for u, w in zip(places, weights, strict=True):
        thin = field("current-loop", radius=f"{20.0 + 10.0 * float(u)!r} mm", current="1 A")
        total += 20.0 * w * magnetic(thin, at)
    assert total == pytest.approx(magnetic(form, at), rel=1e-6, abs=1e-10)


def test_charge_in_a_magnetic_bottle_turns_where_its_moment_says() -> None:
    """mu = m v_perp^2/(2 B) is kept: v_par^2 = v^2 (1 - B/B_t), Jackson, sec. 12.5. Two coils 200
    mm apart, an ion of 100 u on helices of 0.5 mm: the moment drifts by the order of their radius
    over the length in which B changes, 1 %."""
    coils = [
        field(
            "current-loop",
            name=str(z),
            radius="50 mm",
            current="20 kA",
            turns=20,
            centre=["0 mm", "0 mm", f"{z} mm"],
        )
        for z in (-100, 100)
    ]
    middle = magnetic(coils, [[0, 0, 0]])[0, 2]
    across = 0.5e-3 * ION_RATIO * middle
    along = 1.2 * across
    turns = 2.0 * math.pi / (ION_RATIO * middle)
    samples = np.linspace(0.0, 60.0 * turns, 601)
    particles = ions([[0.5e-3, 0.0, 0.0]], [[0.0, -across, along]])
    moving = loop(particles, samples[-1], turns / 60.0, fields=coils, records=samples[1:-1])
    heights, moments = [], []
    for mark in range(1, len(samples)):
        assert moving.to_mark(mark, always)
        x, v = moving.charges.position[:, 0], moving.charges.velocity[:, 0]
        b = magnetic(coils, [x])[0]
        size = math.sqrt(b @ b)
        parallel = float(v @ b) / size
        moments.append((float(v @ v) - parallel**2) / size)
        heights.append(float(x[2]))
    assert np.ptp(moments) < 0.03 * np.mean(moments)
    turning = max(heights)
    mirror = magnetic(coils, [[0, 0, turning]])[0, 2]
    assert 1.0 + 1.2**2 == pytest.approx(mirror / middle, rel=0.02, abs=0.0)
    assert min(heights) < -0.9 * turning
