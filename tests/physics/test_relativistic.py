"""Fast charges in the scheme midpoint-rotation, against closed forms.

A. V. Higuera and J. R. Cary, Phys. Plasmas 24 (2017) 052104: a change of momentum that preserves
volume in phase space and leaves the drift across E and B as it is (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from typing import Any

import numpy as np
import pytest
from scipy.optimize import brentq

from driftwell.constants import ATOMIC_MASS, ELECTRON_MASS, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from driftwell.fields.form import FieldForm
from driftwell.stepping.loop import TimeLoop
from tests.cases import field
from tests.moving import Floats, ions, loop, to_end

NEW, DEFAULT = "midpoint-rotation", "kick-drift-kick"
PROTON = 1.67262192595e-27  # kg
LIGHT = SPEED_OF_LIGHT


def moved(
    place: Any, proper: Any, duration: float, steps: int, fields: Sequence[FieldForm], **keys: Any
) -> TimeLoop:
    """Charges that do not push each other, electrons unless said otherwise, at the end."""
    mass, charge = keys.pop("mass", ELECTRON_MASS), keys.pop("charge", -1.0)
    start = ions(place, proper, charge=charge, mass=mass / ATOMIC_MASS)
    options = {"scheme": NEW, **keys}
    return to_end(loop(start, duration, duration / steps, fields=fields, **options))


def coil(strength: float) -> FieldForm:
    """A uniform magnetic field along z, T."""
    return field("uniform-magnetic", strength=f"{strength!r} T")


def plates(strength: float, along: Sequence[float]) -> FieldForm:
    """A uniform electric field, V/m."""
    return field("uniform-electric", strength=f"{strength!r} V/m", along=list(along))


def test_a_thousand_turns_at_gamma_ten_are_off_by_what_the_equations_say() -> None:
    """By 1.0029501 rad after 1e5 steps of 2 pi/100; speed and radius are kept to rounding.

    In a magnet alone a step turns u by an angle a with tan(a/2) gamma(u cos(a/2)) = b, gamma being
    that of the mean u (Higuera and Cary, eq. 20), solved here by scipy: a - theta is about
    theta^3 (beta^2/8 - 1/12). A tangent with the gamma of u itself would lag by 2.07 rad, and
    kick-drift-kick turns exactly, which test_single_charges.py holds it to.
    """
    period, radius = 3.5723867577410623e-09, 0.1695965067650099
    proper = LIGHT * math.sqrt(99.0)
    found = moved([0.0, 0.0, 0.0], [proper, 0.0, 0.0], 1000 * period, 100_000, [coil(0.1)]).charges
    u = found.velocity[:, 0]
    assert proper == pytest.approx(float(np.linalg.norm(u)), rel=1e-12, abs=0.0)
    half = math.pi / 100.0

    def excess(a: float) -> float:
        return math.tan(a) * math.sqrt(1.0 + 99.0 * math.cos(a) ** 2) - 10.0 * half

    turned = 2e5 * (brentq(excess, 0.5 * half, 2.0 * half, xtol=1e-18, rtol=1e-15) - half)
    assert 1.00295 == pytest.approx(turned, abs=1e-5)
    assert turned == pytest.approx(math.atan2(u[1], u[0]), abs=1e-8)
    centre = found.position[:2, 0] - radius / proper * np.array([u[1], -u[0]])
    wide = radius * (1.0 / math.cos(math.atan(half)) - 1.0)  # the corners of the polygon
    assert np.linalg.norm(centre - [0.0, radius]) < 2.0 * wide


@pytest.mark.parametrize(("scheme", "least", "most"), [(NEW, 0.0, 1e-12), (DEFAULT, 1e-9, 1e-2)])
def test_no_force_leaves_an_electron_of_gamma_100_straight(
    scheme: str, least: float, most: float
) -> None:
    """In 1 T and E = v B, a metre in 1000 steps; deflection in m, and change of gamma.

    J.-L. Vay, Phys. Plasmas 15 (2008) 056701 (from memory). Kick-drift-kick turns about B after
    each kick, and errs: by the square of the step.
    """
    gamma = 100.0
    speed = LIGHT * math.sqrt(1.0 - 1.0 / gamma**2)
    found = moved(
        [0.0, 0.0, 0.0],
        [gamma * speed, 0.0, 0.0],
        1.0 / speed,
        1000,
        [coil(1.0), plates(speed, [0, 1, 0])],
        scheme=scheme,
    ).charges
    assert 1.0 == pytest.approx(float(found.position[0, 0]), rel=1e-5, abs=0.0)
    assert least <= float(np.abs(found.position[1:, 0]).max()) <= most
    if scheme == NEW:
        after = math.sqrt(1.0 + float((found.velocity[:, 0] ** 2).sum()) / LIGHT**2)
        assert gamma == pytest.approx(after, rel=1e-11, abs=0.0)


@pytest.mark.parametrize("whirl", [0.3, 10.0, 1e3])
def test_the_drift_across_both_fields_is_exact_in_steps_of_many_turns(whirl: float) -> None:
    """v = E x B / B^2 plus any speed along B, at gamma 1.5, with `whirl` rad of gyration a step."""
    magnet = np.array([0.2, -0.3, 0.6])
    across = np.cross([0.3, 0.8, 0.1], magnet)
    speed = 0.7 * LIGHT * across / np.linalg.norm(across) + 0.24 * LIGHT * magnet / 0.7
    gamma = 1.0 / math.sqrt(1.0 - float(speed @ speed) / LIGHT**2)
    electric = -np.cross(speed, magnet)
    step = whirl * gamma * ELECTRON_MASS / (ELEMENTARY_CHARGE * 0.7)
    fields = [
        field("uniform-magnetic", strength="0.7 T", along=magnet.tolist()),
        plates(float(np.linalg.norm(electric)), electric.tolist()),
    ]
    found = moved([0.0, 0.0, 0.0], gamma * speed, 50 * step, 50, fields).charges
    assert 1.4 < gamma < 1.6
    assert 50 * step * speed == pytest.approx(found.position[:, 0], rel=1e-12, abs=0.0)
    assert gamma * speed == pytest.approx(found.velocity[:, 0], rel=1e-12, abs=0.0)


@pytest.mark.parametrize("corners", [3, 4, 7])
def test_a_cycloid_of_few_corners_drifts_by_exactly_e_over_b(corners: int) -> None:
    """A proton from rest; omega h = 2 tan(pi/n) closes its turn in n steps, of which 3 are coarse.

    Common practice, no source: the rotation by 2 atan(omega h / 2) about the drifting centre.
    """
    step = 2.0 * math.tan(math.pi / corners) * PROTON / (ELEMENTARY_CHARGE * 0.02)
    steps = 20 * corners
    found = moved(
        [0.0, 0.0, 0.0],
        [0.0, 0.0, 0.0],
        steps * step,
        steps,
        [coil(0.02), plates(0.5, [0, 1, 0])],
        mass=PROTON,
        charge=1.0,
    ).charges
    drift = 0.5 / 0.02
    assert drift * steps * step == pytest.approx(float(found.position[0, 0]), rel=1e-11, abs=0.0)
    assert abs(found.position[1, 0]) < 1e-11 * found.position[0, 0]


def test_a_proton_from_rest_in_crossed_fields_goes_on_its_cycloid() -> None:
    """0.02 T and 500 V/m after 3.3 turns: x 0.25816630 m, y 0.01708216 m.

    Landau & Lifshitz, The Classical Theory of Fields, sec. 22. 3000 steps a turn lag by 7.6e-6 of
    a radian, 1e-7 m on the circle of 13 mm; order 2 makes that a quarter with twice the steps.
    """
    errors = []
    for steps in (9_900, 19_800):
        found = moved(
            [0.0, 0.0, 0.0],
            [0.0, 0.0, 0.0],
            1.0823088367941155e-05,
            steps,
            [coil(0.02), plates(500.0, [0, 1, 0])],
            mass=PROTON,
            charge=1.0,
        ).charges
        expected = np.array([0.25816629622383547, 0.01708215623490911, 0.0])
        errors.append(float(np.abs(found.position[:, 0] - expected).max()))
    assert 3e-8 < errors[0] < 3e-7
    assert 4.0 == pytest.approx(errors[0] / errors[1], rel=0.15, abs=0.0)


@pytest.mark.parametrize(
    ("time", "distance", "gamma"),
    [
        (1e-10, 0.00814497352564516, 1.1593931555949202),
        (1e-9, 0.2530163937904688, 5.9514073061784885),
        (1e-8, 2.9472601544652792, 58.67644239729833),
    ],
)
def test_an_electron_pulled_steadily_moves_on_a_hyperbola(
    time: float, distance: float, gamma: float
) -> None:
    """Its momentum is exact, its way of order 2: 10 MV/m.

    L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, sec. 20.
    """
    errors = []
    for steps in (500, 1000):
        pulled = [plates(1e7, [-1, 0, 0])]
        found = moved([0.0, 0.0, 0.0], [0.0, 0.0, 0.0], time, steps, pulled).charges
        proper = LIGHT * math.sqrt(gamma**2 - 1.0)
        assert [proper, 0.0, 0.0] == pytest.approx(found.velocity[:, 0], rel=1e-11, abs=0.0)
        errors.append(float(found.position[0, 0]) / distance - 1.0)
    assert 1e-8 < abs(errors[1]) < 1e-4
    assert 4.0 == pytest.approx(errors[0] / errors[1], rel=0.02, abs=0.0)


@pytest.mark.parametrize("scheme", [NEW, DEFAULT])
def test_betatron_swings_of_gamma_50_have_the_heavy_mass(scheme: str) -> None:
    """omega = w0 / sqrt(gamma), to 1e-5, with w0 = 2e10 rad/s and 10 um: 5.25 swings.

    M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.3 (from memory); 2000
    steps a swing are off by 4e-7.
    """
    gamma, natural = 50.0, 2e10
    radius = 1e-2
    voltage = ELECTRON_MASS * (natural * radius) ** 2 / (2.0 * ELEMENTARY_CHARGE)
    channel = field("electric-multipole", order=2, radius="10 mm", voltage=f"{-voltage!r} V")
    swing = 2.0 * math.pi * math.sqrt(gamma) / natural
    proper = LIGHT * math.sqrt(gamma**2 - 1.0)
    found = moved(
        [1e-5, 0.0, 0.0], [0.0, 0.0, proper], 5.25 * swing, 10_500, [channel], scheme=scheme
    ).charges
    turned = 2.0 * math.pi * 5.25
    assert -1e-5 * natural * math.sqrt(gamma) == pytest.approx(
        float(found.velocity[0, 0]), rel=1e-5, abs=0.0
    )
    assert 0.0 == pytest.approx(float(found.position[0, 0]) / 1e-5, abs=1e-5 * turned)
    way = 0.9997999977746999 * LIGHT * 5.25 * swing
    # the published speed leaves out 1/(8 gamma^4), 2e-8
    assert way == pytest.approx(float(found.position[2, 0]), rel=5e-8, abs=0.0)


OFFSETS = np.array([-4, -3, -2, -1, 1, 2, 3, 4], dtype=float)
WEIGHTS = np.array([1 / 280, -4 / 105, 1 / 5, -4 / 5, 4 / 5, -1 / 5, 4 / 105, -1 / 280])
"""Of the central difference of order 8 (B. Fornberg, Math. Comp. 51 (1988) 699; from memory)."""
STRONG = [
    coil(0.4),
    plates(6e7, [0.2, 1.0, -0.3]),
    field("static-quadrupole", voltage="300 kV", radius="20 mm", half_length="15 mm"),
    field("magnetic-multipole", order=2, radius="20 mm", strength="0.5 T"),
]


def volume_of_one_step(place: Floats, proper: Floats, step: float) -> float:
    """Determinant of the derivative of a step's end by its beginning, in position and momentum."""
    start = np.concatenate([place / 1e-2, proper / LIGHT])
    size = 2e-3
    around = start + size * np.einsum("k,ij->kij", OFFSETS, np.eye(6))
    flat = around.reshape(-1, 6)
    found = moved(flat[:, :3] * 1e-2, flat[:, 3:] * LIGHT, step, 1, STRONG).charges
    ends = np.concatenate([found.position / 1e-2, found.velocity / LIGHT]).T.reshape(8, 6, 6)
    return float(np.linalg.det(np.einsum("k,kij->ji", WEIGHTS, ends) / size))


@pytest.mark.parametrize("whirl", [0.2, 1.0, 3.0])
def test_a_step_keeps_volume_in_phase_space(whirl: float) -> None:
    """However long: with up to 3 rad of gyration in it, in fields that vary in space.

    Higuera and Cary (2017), sec. III. What is left is of the differences.
    """
    step = whirl * ELECTRON_MASS / (ELEMENTARY_CHARGE * 0.4)
    for place, proper in (
        ([3e-3, -2e-3, 1e-3], [0.9, -0.5, 1.4]),
        ([-1e-3, 4e-3, -2e-3], [-0.3, 2.0, 0.1]),
    ):
        found = volume_of_one_step(np.array(place), LIGHT * np.array(proper), step)
        assert 1.0 == pytest.approx(found, rel=1e-9, abs=0.0)


def test_a_step_backwards_undoes_a_step() -> None:
    """With the velocity turned round, and the magnets."""
    place = np.array([[3e-3, -2e-3, 1e-3], [-1e-3, 4e-3, -2e-3]])
    proper = LIGHT * np.array([[0.9, -0.5, 1.4], [-0.3, 2.0, 0.1]])
    there = moved(place, proper, 4e-12, 4, STRONG).charges
    turned = [
        coil(-0.4),
        *STRONG[1:3],
        field("magnetic-multipole", order=2, radius="20 mm", strength="-0.5 T"),
    ]
    back = moved(there.position.T, -there.velocity.T, 4e-12, 4, turned).charges
    assert place == pytest.approx(back.position.T, abs=1e-15)
    assert proper == pytest.approx(-back.velocity.T, abs=1e-13 * LIGHT)
