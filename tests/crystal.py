"""Ion crystals in a trap that holds them alike on all axes: where they stand, and the scenario.

No static potential holds a charge on all axes (Earnshaw), but a uniform magnetic field does with a
static quadrupole: seen from a frame that turns with half the cyclotron frequency, ions of one kind
move as without a magnet in the potential

    m/2 [omega_z^2 z^2 + (omega_c^2 / 4 - omega_z^2 / 2) (x^2 + y^2)]                      (1)

(Larmor's theorem: Landau & Lifshitz, The Classical Theory of Fields, sec. 45). Here
omega_c^2 = 6 omega_z^2, so (1) is the same on all axes. Lengths in l = (k q^2 / (m omega^2))^(1/3),
energies in m omega^2 l^2.
"""

from __future__ import annotations

import math
from typing import Any

import numpy as np
from scipy.optimize import minimize

from driftwell.constants import ELEMENTARY_CHARGE
from tests.running import Floats, points, quantity, species

ION = 6.6359e-26  # kg
FREQUENCY = 100e3  # Hz
OMEGA = 2.0 * math.pi * FREQUENCY
LENGTH = 2.065067291239522e-05
"""l, m."""
ENERGY = 1.117192432694808e-23
"""m omega^2 l^2, J."""
TURN = -math.sqrt(1.5) * OMEGA
"""Angular frequency of the frame: half the cyclotron frequency, against the field, rad/s."""


def crystal(count: int) -> Floats:
    """Places (n, 3), in l, of the lowest of some minima."""
    random = np.random.default_rng(count)
    starts = random.normal(size=(12, count, 3)) * count ** (1.0 / 3.0)
    found = [
        minimize(_energy_and_slope, start.ravel(), jac=True, method="BFGS", options={"gtol": 1e-9})
        for start in starts
    ]
    place: Floats = min(found, key=lambda each: float(each.fun)).x.reshape(-1, 3)
    return place


def _energy_and_slope(flat: Floats) -> tuple[float, Floats]:
    place = flat.reshape(-1, 3)
    apart = place[:, None] - place[None, :]
    distance = np.sqrt((apart**2).sum(axis=2))
    np.fill_diagonal(distance, np.inf)
    energy = 0.5 * (flat @ flat) + 0.5 * (1.0 / distance).sum()
    return energy, (place - (apart / distance[:, :, None] ** 3).sum(axis=1)).ravel()


def at_rest_in_the_frame(place: Floats) -> dict[str, Any]:
    """Sections of a scenario: ions at `place` (n, 3) in l that turn with the frame."""
    metres = LENGTH * place
    velocity = TURN * np.stack([-metres[:, 1], metres[:, 0], 0.0 * metres[:, 2]], axis=1)
    strength = -2.0 * TURN * ION / ELEMENTARY_CHARGE
    return {
        "species": {"ion": species(ION)},
        "cloud": [points("crystal", "ion", metres, velocity)],
        "field": [
            {
                "name": "caps",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": f"{FREQUENCY} Hz"},
            },
            {"name": "coil", "kind": "uniform-magnetic", "strength": quantity(strength, "T")},
        ],
    }


def in_the_frame(time: Floats, position: Floats) -> Floats:
    """Positions (k, n, 3), m, seen from the turning frame, in l."""
    cosine, sine = np.cos(TURN * time)[:, None], np.sin(TURN * time)[:, None]
    x, y, z = np.moveaxis(position, 2, 0) / LENGTH
    return np.stack([cosine * x + sine * y, cosine * y - sine * x, z], axis=2)
