"""Relaxation of a uniform plasma of one sign by its own encounters, through the pair sum alone.

Charges in a ball, before a uniform background of the opposite charge: the mean force is zero. Its
wall sends each back the way it came, which keeps the square of every component: so only encounters
change the temperatures. Units: Wigner-Seitz radius a = 1, m = 1,
and K q^2 = 1, so that the background pulls with -r, the plasma frequency is sqrt(3), n = 3/(4 pi),
and k T = 1/Gamma. Gamma = 0.1, where few encounters are hard and a step of 0.004 resolves them.

Rates with the Coulomb logarithms of screened classical scattering, L1 = 2.60 for exchange of heat
and L2 = 3.08 for isotropisation at Gamma = 0.1, good to 0.4 (13 %): R. L. Liboff, Phys. Fluids 2
(1959) 40; E. A. Mason, R. J. Munn and F. J. Smith, Phys. Fluids 10 (1967) 1827; by quadrature.
Three clouds of 2000 charges scatter by 12 % (standard deviation), and another processor's last bit
makes another cloud: hence 40 %. A force wrong by a factor of 2 shows as a factor of 4.
"""

from __future__ import annotations

import math

import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.coulomb.direct import direct_field, workspace

Floats = NDArray[np.float64]

COUNT, SEEDS, STEP = 2000, 3, 0.004
TEMPERATURE = 10.0
BLUNT = 1e-4
"""Square of a softening of a tenth of the distance of closest approach of most pairs."""
DENSITY = 3.0 / (4.0 * math.pi)
EXCHANGE, ISOTROPISATION = 2.596480276530832, 3.081127409079884


def temperatures_in_time(mass: Floats, start: Floats, steps: int, seed: int) -> Floats:
    """Temperatures (steps, 3 axes, n) of charges, as m v^2, that begin with those of `start`."""
    draws = np.random.default_rng(seed)
    n = mass.size
    radius = n ** (1.0 / 3.0)
    away = draws.standard_normal((3, n))
    x = away / np.linalg.norm(away, axis=0) * radius * draws.random(n) ** (1.0 / 3.0)
    v = draws.standard_normal((3, n)) * np.sqrt(start / mass)
    field, work, charge = np.zeros((3, n)), workspace(n), np.ones(n)
    found = np.empty((steps, 3, n))
    direct_field(x, charge, BLUNT, 1.0, work, field)
    for k in range(steps):
        v += 0.5 * STEP * (field - x) / mass
        x += STEP * v
        back = (np.sum(x**2, axis=0) > radius**2) & (np.sum(x * v, axis=0) > 0.0)
        v[:, back] *= -1.0
        direct_field(x, charge, BLUNT, 1.0, work, field)
        v += 0.5 * STEP * (field - x) / mass
        found[k] = mass * v**2
    return found


def decay_rate(difference: Floats) -> float:
    """Rate of an exponential decay, by a straight line through the logarithm of the mean."""
    times = STEP * np.arange(1, difference.size + 1)
    return float(-np.polyfit(times, np.log(difference), 1)[0])


def test_different_temperatures_along_and_across_become_equal_at_the_formularys_rate() -> None:
    """T_par - T_perp decays with nu = 8 sqrt(pi)/5 (K q^2)^2 n L2 / (m^(1/2) (k T)^(3/2)), to 40 %.

    NRL Plasma Formulary, temperature isotropisation, near equal temperatures (from memory).
    """
    rate = 1.6 * math.sqrt(math.pi) * DENSITY * ISOTROPISATION / TEMPERATURE**1.5
    start = TEMPERATURE * np.array([[0.8], [0.8], [1.4]]) * np.ones((3, COUNT))
    difference = np.zeros(2200)
    for seed in range(SEEDS):
        mean = temperatures_in_time(np.ones(COUNT), start, difference.size, seed).mean(axis=2)
        difference += mean[:, 2] - 0.5 * (mean[:, 0] + mean[:, 1])
        total = mean.mean(axis=1)
        assert TEMPERATURE == pytest.approx(total[-1], rel=0.08, abs=0.0)  # the step holds
    assert rate == pytest.approx(decay_rate(difference), rel=0.4, abs=0.0)


def test_two_species_exchange_heat_at_spitzers_rate() -> None:
    """T1 - T2 decays with the sum of both rates, to 40 %, for masses 1 and 2 in equal numbers.

    nu_12 = (8/3) sqrt(2 pi) n_2 (K q^2)^2 L1 / (m1 m2 (k T1/m1 + k T2/m2)^(3/2)): L. Spitzer,
    Physics of Fully Ionized Gases (1962), sec. 5.3, and the NRL Plasma Formulary, thermal
    equilibration (both from memory).
    """
    heavy = np.arange(COUNT) % 2 == 1
    mass = np.where(heavy, 2.0, 1.0)
    hot, cold = 1.35 * TEMPERATURE, 0.65 * TEMPERATURE
    start = np.where(heavy, hot, cold) * np.ones((3, COUNT))
    spread = (cold / 1.0 + hot / 2.0) ** 1.5
    rate = 8.0 / 3.0 * math.sqrt(2.0 * math.pi) * DENSITY * EXCHANGE / (2.0 * spread)
    difference = np.zeros(2200)
    for seed in range(SEEDS):
        found = temperatures_in_time(mass, start, difference.size, 10 + seed).mean(axis=1)
        difference += found[:, heavy].mean(axis=1) - found[:, ~heavy].mean(axis=1)
    assert rate == pytest.approx(decay_rate(difference), rel=0.4, abs=0.0)
