"""Endless beams and lines of charge against closed forms, and a beam in a focusing channel."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from numpy.typing import ArrayLike, NDArray
from scipy.integrate import solve_ivp
from scipy.optimize import brentq, fsolve
from scipy.special import k0, k1
from scipy.stats import qmc

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from tests.cases import field
from tests.coulomb.test_periodic_sum import PERIOD, summed
from tests.moving import ION_MASS, always, ions, loop

Floats = NDArray[np.float64]


def test_two_charges_push_as_the_sum_over_bessel_functions_says() -> None:
    """J. Lekner, Physica A 176 (1991) 485 (from memory), by scipy's Bessel functions.

    sum_k (1/r_k - 1/(|k| L)) = (2/L) (ln 2 - gamma - ln(rho/L))
        + (4/L) sum_n K0(2 pi n rho/L) cos(2 pi n z/L)
    """
    n = np.arange(1, 200)
    for rho, z in ((0.4, 0.3), (0.25, 1.7), (1.1, 0.9)):
        turn = 2.0 * math.pi * n / PERIOD
        level = 2.0 / PERIOD * (math.log(2.0) - np.euler_gamma - math.log(rho / PERIOD))
        level += 4.0 / PERIOD * float(np.sum(k0(turn * rho) * np.cos(turn * z)))
        across = 2.0 / (PERIOD * rho)
        across += 4.0 / PERIOD * float(np.sum(turn * k1(turn * rho) * np.cos(turn * z)))
        along = 4.0 / PERIOD * float(np.sum(turn * k0(turn * rho) * np.sin(turn * z)))
        place = np.array([[0.0, 0.6 * rho], [0.0, 0.8 * rho], [-0.9, z - 0.9]])
        found = summed(place, np.ones(2))
        assert pytest.approx(level, rel=1e-10, abs=0.0) == found.potential[1]
        assert pytest.approx(0.6 * across, rel=1e-10, abs=0.0) == found.field[0, 1]
        assert pytest.approx(0.8 * across, rel=1e-10, abs=0.0) == found.field[1, 1]
        assert pytest.approx(along, rel=1e-10, abs=0.0) == found.field[2, 1]


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_an_endless_line_pulls_with_one_over_the_distance(method: str) -> None:
    """E = 2 lambda / r: J. D. Jackson, Classical Electrodynamics (1999), problem 1.4.

    Five spacings away the charges of the line are seen as smooth to exp(-10 pi).
    """
    n = 100
    spacing = PERIOD / n
    line = np.zeros((3, n + 3))
    line[2, :n] = spacing * (np.arange(n) + 0.3) - 0.5 * PERIOD
    away = np.array([5.0, 9.0, 40.0]) * spacing
    line[0, n:], line[2, n:] = away, (-0.99, 0.02, 0.6)
    charge = np.where(np.arange(n + 3) < n, 1.0, 0.0)
    found = summed(line, charge, method).field[:, n:]
    bound = 1e-10 if method == "direct" else 1e-4
    assert pytest.approx(2.0 / spacing / away, rel=bound, abs=0.0) == found[0]
    assert np.abs(found[1:]).max() < bound * np.abs(found[0]).max()


@pytest.mark.parametrize("count", [2, 10])
def test_a_line_of_alternating_charges_has_the_potential_minus_two_ln_2(count: int) -> None:
    """-2 (1 - 1/2 + 1/3 - ...) at each charge, elementary."""
    place, charge = np.zeros((3, count)), np.array([1.0, -1.0] * (count // 2))
    spacing = PERIOD / count
    place[2] = spacing * np.arange(count) - 0.5 * PERIOD
    found = summed(place, charge)
    assert np.full(count, -2.0 * math.log(2.0)) == pytest.approx(
        found.potential * charge * spacing, rel=1e-10, abs=0.0
    )
    assert np.abs(found.field).max() < 1e-10 / spacing**2


@pytest.mark.parametrize("method", ["direct", "tree"])
def test_a_round_beam_pushes_linearly_inside_and_as_a_line_outside(method: str) -> None:
    """E = 2 lambda r / R^2 and 2 lambda / r, by Gauss' law; places are evenly spread."""
    radius, n = 0.4, 2048
    even = qmc.Halton(3, rng=np.random.default_rng(1)).random(n + 256).T
    r = radius * np.sqrt(even[0])
    r[n:] = radius * (1.5 + even[0, n:])
    turn = 2.0 * math.pi * even[1]
    place = np.array([r * np.cos(turn), r * np.sin(turn), PERIOD * (even[2] - 0.5)])
    charge = np.where(np.arange(n + 256) < n, PERIOD / n, 0.0)  # lambda = 1
    found = summed(place, charge, method, softening=0.01 * radius)
    outward = (found.field[:2] * place[:2]).sum(axis=0)
    assert pytest.approx(np.full(256, 2.0), rel=0.1, abs=0.0) == outward[n:]
    assert pytest.approx(2.0, rel=2e-3, abs=0.0) == outward[n:].mean()
    within = r < 0.8 * radius
    inner = np.polyfit((r[within] / radius) ** 2, outward[within], 1)
    assert pytest.approx(2.0, rel=0.03, abs=0.0) == inner[0]
    assert abs(inner[1]) < 0.03


FREQUENCY = 10e6
BORE, RADIUS = 0.1, 0.02


class Channel:
    """A beam of Kapchinskij and Vladimirskij in a channel that focuses in turn in x and in y.

    In the beam's frame the channel is a quadrupole that oscillates. With a and b the half axes,
    epsilon the area over pi in (x, dx/dt), K the charge:

        a'' + k(t) a - 2 K / (a + b) - epsilon^2 / a^3 = 0,    b alike with -k(t)               (1)

    M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 5.3, 4.4 (from memory).
    """

    def __init__(self) -> None:
        period = 1.0 / FREQUENCY
        self.strength = float(brentq(lambda k: self.advance(k) - 1.2, 2e14, 1.5e15))
        self.emittance = 0.7 * FREQUENCY * RADIUS**2
        self.charge = 0.8 * FREQUENCY**2 * RADIUS**2
        self.period = period
        found = fsolve(self._unmatched, [1.2 * RADIUS, 0.8 * RADIUS], xtol=1e-11)
        self.half_axes = (float(found[0]), float(found[1]))
        path = self.envelope(*self.half_axes)
        t = np.linspace(0.0, period, 2001)
        inverse = self.emittance / path(t)[0] ** 2
        self.depressed = float(np.sum(0.5 * (inverse[1:] + inverse[:-1])) * (t[1] - t[0]))

    def advance(self, strength: float) -> float:
        """Phase of one charge in a period without other charges, rad."""
        columns = [
            solve_ivp(
                lambda t, s: [s[1], -strength * math.cos(2 * math.pi * FREQUENCY * t) * s[0]],
                (0.0, 1.0 / FREQUENCY),
                start,
                rtol=1e-10,
                atol=1e-20,
            ).y[:, -1]
            for start in ([1.0, 0.0], [0.0, FREQUENCY])
        ]
        return math.acos(0.5 * (columns[0][0] + columns[1][1] / FREQUENCY))

    def envelope(self, a: float, b: float) -> Callable[[ArrayLike], Floats]:
        """The half axes in one period, from rest, as a function of time: eq. (1)."""

        def slope(t: float, s: Floats) -> list[float]:
            k = self.strength * math.cos(2.0 * math.pi * FREQUENCY * t)
            mutual = 2.0 * self.charge / (s[0] + s[2])
            return [
                s[1],
                -k * s[0] + mutual + self.emittance**2 / s[0] ** 3,
                s[3],
                k * s[2] + mutual + self.emittance**2 / s[2] ** 3,
            ]

        start = [a, 0.0, b, 0.0]
        found = solve_ivp(
            slope, (0.0, 1.0 / FREQUENCY), start, rtol=1e-10, atol=1e-14, dense_output=True
        )
        return found.sol  # type: ignore[no-any-return]

    def _unmatched(self, axes: Floats) -> Floats:
        end = self.envelope(*axes)(1.0 / FREQUENCY)
        return np.array([end[1], end[3]]) / (FREQUENCY * RADIUS)


def test_a_beam_keeps_its_envelope_and_its_depressed_tune_in_a_focusing_channel() -> None:
    """KV beam of 2048 macro-charges in a short cell: sizes to 1 %, phase per period to 2 %.

    Softening, a thirtieth of the radius, and the macro-charges' number are what it errs by.
    """
    channel = Channel()
    a, b = channel.half_axes
    n, length = 2048, 3.0 * RADIUS
    even = qmc.Sobol(4, rng=np.random.default_rng(2)).random(n).T
    first, second = np.sqrt(even[0]), np.sqrt(1.0 - even[0])
    x, vx = first * np.cos(2 * math.pi * even[1]), first * np.sin(2 * math.pi * even[1])
    y, vy = second * np.cos(2 * math.pi * even[2]), second * np.sin(2 * math.pi * even[2])
    place = np.array([a * x, b * y, length * (even[3] - 0.5)]).T
    emittance = channel.emittance
    speed = np.array([emittance / a * vx, emittance / b * vy, np.full(n, 2e5)]).T
    # K = Q lambda / (2 pi eps0 m)
    line = 0.5 * ION_MASS * channel.charge / (ELEMENTARY_CHARGE * COULOMB_CONSTANT)
    weight = line * length / (n * ELEMENTARY_CHARGE)
    volts = channel.strength * ION_MASS * BORE**2 / ELEMENTARY_CHARGE
    periods = 4
    times = channel.period * np.arange(1, periods + 1)
    moving = loop(
        ions(place, speed, weight=weight),
        periods * channel.period,
        channel.period / 40.0,
        fields=[
            field(
                "rf-quadrupole",
                radius=f"{BORE!r} m",
                voltage={
                    "amplitude": f"{volts!r} V",
                    "frequency": f"{FREQUENCY!r} Hz",
                },
            )
        ],
        coulomb=Coulomb(method="direct", softening=f"{RADIUS / 30!r} m"),
        records=times,
        threads=2,
        cell=Cell(axis="z", length=f"{length!r} m"),
    )
    seen = [np.concatenate([moving.charges.position[:2], moving.charges.velocity[:2]])]
    for mark in range(1, len(moving.schedule.steps) + 1):
        assert moving.to_mark(mark, always)
        if np.isclose(moving.time, times, rtol=1e-9, atol=0.0).any():
            seen.append(np.concatenate([moving.charges.position[:2], moving.charges.velocity[:2]]))
    assert periods + 1 == len(seen)
    for state in seen:
        assert pytest.approx(0.5 * a, rel=0.01, abs=0.0) == state[0].std()
        assert pytest.approx(0.5 * b, rel=0.01, abs=0.0) == state[1].std()
    for axis in (0, 1):
        before = np.concatenate([state[axis::2] for state in seen[:-1]], axis=1)
        after = np.concatenate([state[axis::2] for state in seen[1:]], axis=1)
        matrix = after @ before.T @ np.linalg.inv(before @ before.T)
        phase = math.acos(0.5 * float(np.trace(matrix)))
        assert pytest.approx(channel.depressed, rel=0.02, abs=0.0) == phase
    assert channel.depressed < 0.75 * 1.2
