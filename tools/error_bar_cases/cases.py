"""What the answers of the scenarios in this folder truly are.

`flight`: places and velocities of a thermal cloud are independent Gaussians, so that

    s^2(t) = sigma^2 + (kT/m) t^2,    normalised emittance sigma (kT/m)^(1/2)/c               (1)
    part within a radius R = mean over the times of arrival of 1 - exp(-R^2/(2 s^2))          (2)

and all fly at one speed v along z: the times of arrival have the mean L/v, the rms sigma_z/v.

`bath`: in equilibrium kT = m <v^2> = m omega^2 <x^2>.

`gas`: ions meet atoms at the same rate nu = n k_L at any speed and leave in all directions; a share
p of the collisions ends the ion:

    mobility q/(mu nu),   lifetime 1/(p nu),   part left exp(-p nu t)                         (3)

X = <v_x^2> across the drift v and Z = <v_z^2> along it obey, with s = m + M, A = kT/M,

    X (s^2 - m^2 - 2 M^2/3) - Z M^2/3 = 2 M^2 A
    Z (s^2 - m^2 - M^2/3) - X 2 M^2/3 = 2 M^2 A + 2 s M v^2                                   (4)

(the balance of what collisions bring and take; for v = 0 it gives X = Z = kT/m).

Where charges push each other, in `explosion` and `crystal`, there is no closed form for draws of
few charges: the mean over all seeds takes its place, save for the centre, which rests.

References
----------
S. Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, sec. II (`bath`); G. H. Wannier, Bell Syst. Tech. J.
32 (1953) 170 (eq. 3). From memory. Eqs. (1), (2) and (4) were worked out here.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from scipy.optimize import brentq

from driftwell.constants import (
    ATOMIC_MASS,
    BOLTZMANN,
    COULOMB_CONSTANT,
    ELEMENTARY_CHARGE,
    SPEED_OF_LIGHT,
)

FOLDER = Path(__file__).parent
KELVIN = 300.0


@dataclass(frozen=True, slots=True)
class Case:
    """A scenario and what its answers truly are, by question; left out: the mean over all seeds.

    name : of the file in this folder
    known : truths in the answers' SI units
    about : what kind of case it is, in a few words
    """

    name: str
    about: str
    known: dict[str, float]

    @property
    def path(self) -> Path:
        """The scenario."""
        return FOLDER / f"{self.name}.toml"


def _flight() -> dict[str, float]:
    mass, sigma, length, speed = 40.0 * ATOMIC_MASS, 2e-3, 0.5e-3, 1e3
    square = BOLTZMANN * KELVIN / mass
    node, share = np.polynomial.hermite_e.hermegauss(40)
    share = share / share.sum()

    def within(radius: float, distance: float) -> float:
        """Eq. (2)."""
        time = (distance - length * node) / speed
        return float(share @ -np.expm1(-(radius**2) / (2.0 * (sigma**2 + square * time**2))))

    return {
        "size after 5 us": math.sqrt(sigma**2 + square * 5e-6**2),
        "temperature across": KELVIN,
        "emittance, normalised": sigma * math.sqrt(square) / SPEED_OF_LIGHT,
        "part through the hole": within(6e-3, 10e-3),
        "arrival, mean": 9e-3 / speed,
        "arrival, rms": length / speed,
        "radius of nine tenths": brentq(lambda radius: within(radius, 9e-3) - 0.9, 1e-3, 1e-1),
    }


def _bath() -> dict[str, float]:
    square = BOLTZMANN * KELVIN / (100.0 * ATOMIC_MASS)
    return {
        "temperature, in a window": KELVIN,
        "size, in a window": math.sqrt(square) / (2.0 * math.pi * 20e3),
        "centre, in a window": 0.0,
        "temperature, at the end": KELVIN,
    }


def _gas() -> dict[str, float]:
    ion, atom, time, field = 60.0 * ATOMIC_MASS, 28.0 * ATOMIC_MASS, 200e-6, 200.0
    both, reduced = ion + atom, ion * atom / (ion + atom)
    # k_L = q/(2 eps0) (4 pi eps0 alpha_V/mu)^(1/2)
    capture = 2.0 * math.pi * ELEMENTARY_CHARGE * math.sqrt(COULOMB_CONSTANT * 1.74e-30 / reduced)
    rate = 20.0 / (BOLTZMANN * KELVIN) * capture
    drift = ELEMENTARY_CHARGE * field / (reduced * rate)
    first, third = both**2 - ion**2 - 2.0 * atom**2 / 3.0, atom**2 / 3.0
    heat = 2.0 * atom * BOLTZMANN * KELVIN
    across, _ = np.linalg.solve(
        [[first, -third], [-2.0 * third, first + third]],
        [heat, heat + 2.0 * both * atom * drift**2],
    )
    return {
        "mobility": drift / field,
        "lifetime": 1.0 / (0.002 * rate),
        "part left": math.exp(-0.002 * rate * time),
        "temperature across the drift": float(ion * across / BOLTZMANN),
    }


CASES = (
    Case("flight", "independent charges", _flight()),
    Case("bath", "means in time, and 50 charges", _bath()),
    Case("gas", "chance on the way", _gas()),
    Case("explosion", "charges that push each other", {"centre at the end": 0.0}),
    Case("crystal", "charges that order each other", {}),
)
"""The first three have closed forms for all answers, and are held to what bars must cover."""
HELD = 3
