"""Proper velocity u = gamma v, and what goes with it.

    gamma = sqrt(1 + u^2/c^2)                                                   (1)
    kinetic energy = (gamma - 1) m c^2 = m u^2 / (gamma + 1)                    (2)
    u = c sqrt(e (e + 2)),  e = kinetic energy / (m c^2)                        (3)
    u = u' + U (gamma' + u' . U / (c^2 (Gamma + 1)))                            (4)

(4) adds a proper velocity u' seen in a frame that moves with proper velocity U.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), secs. 11.3-11.5 (from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import SPEED_OF_LIGHT

Floats = NDArray[np.float64]


def proper_velocity(velocity: Floats) -> Floats:
    """Proper velocities of ordinary ones, (3, n), m/s; all must be slower than light."""
    square = np.sum((velocity / SPEED_OF_LIGHT) ** 2, axis=0)
    root = np.sqrt(1.0 - square)
    # gamma - 1 = beta^2 / (root + root^2) leaves slow velocities as they are
    return np.asarray(velocity + velocity * (square / (root + root**2)))


def gamma(velocity: Floats) -> Floats:
    """Lorentz factors of proper velocities (3, n), eq. 1."""
    return np.asarray(np.sqrt(1.0 + np.sum((velocity / SPEED_OF_LIGHT) ** 2, axis=0)))


def kinetic_energy(velocity: Floats, mass: float) -> Floats:
    """Kinetic energies, J, of proper velocities (3, n), eq. 2."""
    return np.asarray(mass * np.sum(velocity**2, axis=0) / (gamma(velocity) + 1.0))


def proper_speed(energy: Floats, mass: float) -> Floats:
    """Proper speeds, m/s, of kinetic energies in J, eq. 3."""
    ratio = energy / (mass * SPEED_OF_LIGHT**2)
    return np.asarray(SPEED_OF_LIGHT * np.sqrt(ratio) * np.sqrt(ratio + 2.0))


def carried(inner: Floats, by: Floats) -> Floats:
    """Proper velocities `inner` in frames that move with proper velocities `by`, eq. 4."""
    projection = np.sum(inner * by, axis=0) / SPEED_OF_LIGHT**2
    return np.asarray(inner + by * (gamma(inner) + projection / (gamma(by) + 1.0)))
