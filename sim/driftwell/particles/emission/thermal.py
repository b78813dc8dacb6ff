"""Thermal emission: velocities of charges that leave a surface at a temperature.

Through the surface come those of a Maxwellian in proportion to their speed along the normal n:

    f(u_n) ~ u_n exp(-m u_n^2/(2 kT)),    u_n = sqrt(-2 kT/m ln R),  R uniform in (0, 1)     (1)

and Gaussian velocities of variance kT/m along the surface. On average they carry 2 kT; the angle to
the normal has the density sin(2 theta).

References
----------
NRL Plasma Formulary, and any text on effusion (from memory); common practice.
"""

from __future__ import annotations

import numpy as np

from driftwell.constants import BOLTZMANN
from driftwell.forms.body import Body
from driftwell.particles.draws import Draws
from driftwell.particles.proper_velocity import Floats


def thermal_emission(temperature: float, normal: Floats, draws: Draws, body: Body) -> Floats:
    """Proper velocities (3, n), m/s, about outward unit normals (3, n), eq. (1).

    temperature : K, far below the rest energy
    """
    count = normal.shape[1]
    scale = np.sqrt(BOLTZMANN * temperature / body.mass)
    out = scale * np.sqrt(-2.0 * np.log(draws.unit_points("emission", count, 1)[0]))
    along = draws.stream("emission along the surface").standard_normal((count, 2)).T * scale
    # two unit vectors across the normal: from the coordinate axis it is least along
    least = np.argmin(np.abs(normal), axis=0)
    first = np.zeros_like(normal)
    first[least, np.arange(count)] = 1.0
    first -= normal * (first * normal).sum(axis=0)
    first /= np.linalg.norm(first, axis=0)
    second = np.cross(normal, first, axis=0)
    return np.asarray(out * normal + along[0] * first + along[1] * second)
