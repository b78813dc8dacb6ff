"""Drag, heat baths and laser light against closed forms."""

from __future__ import annotations

import math
from typing import Any

import numpy as np
import pytest
from scipy.constants import Planck, hbar
from scipy.integrate import solve_ivp
from scipy.stats import kstest

from driftwell.constants import ATOMIC_MASS, BOLTZMANN, ELEMENTARY_CHARGE
from tests.cases import field, process
from tests.moving import ION_MASS, accounts, always, ions, loop, to_end

DAMPING, TRAP = 2e4, 2.0 * math.pi * 2e4
"""1/s and rad/s, of case L5."""
DRAG = process("mobility-drag", mobility=f"{ELEMENTARY_CHARGE / (ION_MASS * DAMPING)!r} m^2/(V*s)")
BATH = process("thermostat", temperature="300 K", relaxation_time="50 us")
GRADIENT = ION_MASS * TRAP**2 / ELEMENTARY_CHARGE
WELL = field(
    "static-quadrupole", voltage=f"{GRADIENT * 25e-6 / 2.0!r} V", radius="5 mm", half_length="5 mm"
)


def curvature() -> float:
    """Of the well's potential along z as the field has it, 1/s^2."""
    moving = loop(ions([[0.0, 0.0, 1e-3]]), 1e-9, 1e-9, fields=[WELL])
    return float(-moving.work.external[2, 0] * ELEMENTARY_CHARGE / ION_MASS / 1e-3)


@pytest.mark.parametrize("step", [1e-6, 2e-4], ids=["short", "four relaxation times"])
def test_drag_in_a_constant_field_is_solved_exactly_at_any_step(step: float) -> None:
    """v = v_d + (v_0 - v_d) exp(-G t) and its integral, to (v/c)^2; the ledger closes."""
    flow = np.array([0.0, 30.0, 0.0])
    drag = DRAG.model_copy(update={"flow": tuple(flow)})
    start = np.array([500.0, -100.0, 20.0])
    pushed = [field("uniform-electric", strength="25 V/m")]
    moving = loop(ions([[0, 0, 0]], start), 4e-4, step, fields=pushed, processes=[drag])
    rows = accounts(moving)
    final = flow + np.array([0.0, 0.0, 25.0 * ELEMENTARY_CHARGE / (ION_MASS * DAMPING)])
    left = math.exp(-DAMPING * 4e-4)
    speed = final + (start - final) * left
    place = final * 4e-4 + (start - final) * (1.0 - left) / DAMPING
    assert speed == pytest.approx(moving.particles.velocity[:, 0], rel=1e-9, abs=0.0)
    assert place == pytest.approx(moving.particles.position[:, 0], rel=1e-9, abs=0.0)
    for name in ("energy", "momentum", "angular"):
        assert getattr(rows[-1], f"{name}_residual") == pytest.approx(0.0, rel=0.0, abs=1e-9)


def test_a_damped_ion_rings_down_in_its_trap() -> None:
    """Case L5: x/x0 = exp(-G t/2) (cos w1 t + G/(2 w1) sin w1 t), S. Chandrasekhar 1943."""
    omega2 = curvature()
    w1 = math.sqrt(omega2 - DAMPING**2 / 4.0)
    moving = to_end(loop(ions([[0, 0, 1e-3]]), 1e-4, 1e-7, fields=[WELL], processes=[DRAG]))
    t = 1e-4
    expected = math.exp(-DAMPING * t / 2) * (math.cos(w1 * t) + DAMPING / 2 / w1 * math.sin(w1 * t))
    assert expected == pytest.approx(moving.particles.position[2, 0] / 1e-3, rel=0.0, abs=1e-4)


@pytest.mark.parametrize("step", [5e-7, 4e-6], ids=["short steps", "12 steps a period"])
def test_a_heat_bath_fills_a_trap_to_its_temperature(step: float) -> None:
    """Case L5: <z^2> = kT/(m w^2) and <v^2> = kT/m, both Gaussian, of 6000 ions.

    They begin so and stay so over two relaxation times (the well pushes them out sideways). A step
    errs by (w h)^2/4 in <z^2>, which is allowed for: 6 % at 12 steps a period.
    """
    n = 6000
    thermal = math.sqrt(BOLTZMANN * 300.0 / ION_MASS)
    omega = math.sqrt(curvature())
    random, start = np.random.default_rng(6), np.zeros((2, n, 3))
    start[:, :, 2] = random.normal(size=(2, n)) * [[thermal / omega], [thermal]]
    moving = to_end(loop(ions(*start), 1e-4, step, fields=[WELL], processes=[BATH]))
    noise = 4.0 / math.sqrt(2.0 * n)
    x, u = moving.particles.position[2], moving.particles.velocity[2]
    assert thermal == pytest.approx(u.std(), rel=noise, abs=0.0)
    assert thermal / omega == pytest.approx(x.std(), rel=noise + (omega * step) ** 2 / 4.0, abs=0.0)
    assert kstest(u / thermal, "norm").pvalue > 1e-3


def test_a_free_ion_in_a_heat_bath_diffuses() -> None:
    """<x^2> = 2 D (t - (1 - e^-Gt)(3 - e^-Gt)/(2 G)) from rest, D = kT/(m G): at any step.

    S. Chandrasekhar 1943, section II.
    """
    n, t = 6000, 3e-4
    for step in (1e-5, 1.5e-4):
        moving = to_end(loop(ions(np.zeros((n, 3))), t, step, processes=[BATH]))
        left = math.exp(-DAMPING * t)
        diffusion = BOLTZMANN * 300.0 / (ION_MASS * DAMPING)
        expected = 2.0 * diffusion * (t - (1.0 - left) * (3.0 - left) / (2.0 * DAMPING))
        found = (moving.particles.position**2).mean()
        assert expected == pytest.approx(found, rel=4.0 * math.sqrt(2.0 / (3 * n)), abs=0.0)
        speeds = (moving.particles.velocity**2).mean()
        assert BOLTZMANN * 300.0 / ION_MASS * (1.0 - left * left) == pytest.approx(
            speeds, rel=4.0 * math.sqrt(2.0 / (3 * n)), abs=0.0
        )


@pytest.mark.parametrize(("knudsen", "slip"), [(0.01, 1.01257), (1.0, 2.39015), (100.0, 166.2625)])
def test_droplets_fall_with_the_slip_of_cunningham_and_davies(knudsen: float, slip: float) -> None:
    """A droplet of 1000 e in a field: v = Q E C / (3 pi eta d); and C beside it by hand, of
    C. N. Davies 1945 (from memory): 1 + Kn (1.257 + 0.4 exp(-1.1/Kn))."""
    diameter, viscosity = 1e-6, 18.1e-6
    drag = process(
        "stokes-drag",
        diameter="1 um",
        viscosity="18.1 uPa s",
        mean_free_path=f"{knudsen * 0.5} um",
    )
    mass = 1000.0 * math.pi / 6.0 * diameter**3
    droplet = ions([[0, 0, 0]], charge=1000.0, mass=mass / ATOMIC_MASS)
    pushed = [field("uniform-electric", strength="20 kV/m")]
    moving = to_end(loop(droplet, 0.1, 1e-3, fields=pushed, processes=[drag]))
    force = 1000.0 * ELEMENTARY_CHARGE * 20e3
    expected = force * slip / (3.0 * math.pi * viscosity * diameter)
    assert expected == pytest.approx(moving.particles.velocity[2, 0], rel=2e-4, abs=0.0)


def test_drag_across_a_magnet_turns_the_drift() -> None:
    """Crossed E and B with drag: the exact solution of the linear equation, by scipy; order 2.

    v' = Q/m (E + v x B) - G v, with w_c comparable to G.
    """
    strength = 2.0 * DAMPING * ION_MASS / ELEMENTARY_CHARGE
    fields = [
        field("uniform-magnetic", strength=f"{strength!r} T"),
        field("uniform-electric", strength="100 V/m", along=[1.0, 0.0, 0.0]),
    ]
    ratio = ELEMENTARY_CHARGE / ION_MASS

    def rate(t: float, y: Any) -> Any:
        v = y[3:]
        a = ratio * (np.array([100.0, 0.0, 0.0]) + np.cross(v, [0.0, 0.0, strength])) - DAMPING * v
        return np.concatenate([v, a])

    start = [0.0, 0.0, 0.0, 300.0, 0.0, 50.0]
    exact = solve_ivp(rate, (0.0, 2e-4), start, rtol=1e-11, atol=1e-12, method="DOP853").y[:, -1]
    errors = []
    for step in (4e-6, 2e-6):
        moving = loop(ions([[0, 0, 0]], start[3:]), 2e-4, step, fields=fields, processes=[DRAG])
        rows = accounts(moving)
        assert rows[-1].momentum_residual == pytest.approx(0.0, rel=0.0, abs=1e-12)
        assert rows[-1].angular_residual == pytest.approx(0.0, rel=0.0, abs=1e-10)
        errors.append(np.linalg.norm(moving.particles.position[:, 0] - exact[:3]))
    assert 2.0 == pytest.approx(math.log2(errors[0] / errors[1]), rel=0.0, abs=0.1)


WIDTH, WAVE = 20e6, 400e-9


def beam(along: list[float], **keys: Any) -> Any:
    """Light detuned by half a width, of low saturation."""
    made: dict[str, Any] = {
        "name": f"beam {along}",
        "wavelength": "400 nm",
        "linewidth": "20 MHz",
        "detuning": "-10 MHz",
        "saturation": 0.02,
        "direction": along,
    }
    return process("laser-cooling", **made | keys)


def test_beams_on_all_axes_cool_to_the_doppler_limit() -> None:
    """k T = hbar Gamma / 2 in the mean over the axes, from six beams.

    Isotropic emission, detuning -Gamma/2, low saturation: D. J. Wineland and W. M. Itano 1979;
    D. Leibfried et al. 2003 (from memory). The saturation of 0.02 raises it by s/2 = 1 %.
    """
    axes = [[1, 0, 0], [-1, 0, 0], [0, 1, 0], [0, -1, 0], [0, 0, 1], [0, 0, -1]]
    n, limit = 400, hbar * 2.0 * math.pi * WIDTH / 2.0
    mass = 40.0
    start = np.random.default_rng(4).normal(
        scale=math.sqrt(limit / (mass * ATOMIC_MASS)), size=(n, 3)
    )
    particles = ions(np.zeros((n, 3)), start, mass=mass)
    light = [beam([float(k) for k in axis]) for axis in axes]
    moving = loop(particles, 1.2e-3, 3e-6, processes=light, records=np.linspace(3e-4, 1.2e-3, 16))
    found = []
    for mark in range(1, len(moving.schedule.flags)):
        moving.to_mark(mark, always)
        found.append((moving.particles.velocity**2).mean() * mass * ATOMIC_MASS)
    assert limit * 1.01 == pytest.approx(np.mean(found), rel=0.04, abs=0.0)


def test_one_beam_pushes_with_the_scattering_force() -> None:
    """Photons of an ion at rest: R = Gamma/2 s/(1 + s + 4 d^2/Gamma^2); each gives h/lambda.

    The waist lowers s by exp(-2 rho^2/w^2); emission as from a dipole turning about the beam has
    <cos^2> = 2/5, from the integral of (1 + c^2) c^2.
    """
    n, t, far = 3000, 1e-6, 20e-6
    heavy = 4000.0
    for keys, s, share in (
        ({"saturation": 1.5}, 1.5, 1.0 / 3.0),
        (
            {"saturation": 1.5, "waist": "30 um", "emission": "dipole"},
            1.5 * math.exp(-2.0 * (far / 30e-6) ** 2),
            0.4,
        ),
    ):
        moving = loop(
            ions(np.tile([far, 0.0, 0.0], (n, 1)), mass=heavy),
            t,
            1e-7,
            processes=[beam([0.0, 0.0, 1.0], **keys)],
        )
        rows = accounts(moving)
        gamma = 2.0 * math.pi * WIDTH
        expected = 0.5 * gamma * s / (1.0 + s + 1.0) * t * n
        photons = moving.exchanged[0, 7]
        assert expected == pytest.approx(photons, rel=0.0, abs=4.0 * math.sqrt(expected))
        recoil = Planck / WAVE / (heavy * ATOMIC_MASS)
        mean = moving.particles.velocity[2].sum() / recoil
        assert photons == pytest.approx(mean, rel=0.0, abs=4.0 * math.sqrt(photons * share))
        across = (moving.particles.velocity[:2] ** 2).sum() / recoil**2
        assert photons * (1.0 - share) == pytest.approx(across, rel=0.08, abs=0.0)
        assert rows[-1].momentum_residual == pytest.approx(0.0, rel=0.0, abs=1e-12)
