"""What a cloud is like at one time: its sizes, its density, its heat without what flows.

The velocity is parted into what follows the place linearly, as in a swelling, turning or driven
cloud, and the rest, whose mean square is the heat:

    C = <uu> - <ux> <xx>^-1 <xu>,    kT = m tr C / 3                                          (1)

in the rest frame of the mean velocity. The density is that of the even ellipsoid with the same
second moments.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np

from driftwell.constants import SPEED_OF_LIGHT
from driftwell.coulomb.bunch_frames import places_within, velocities_within
from driftwell.particles.state import Particles

LEAST = 10
"""Charges from which a cloud has a state."""


@dataclass(frozen=True, slots=True)
class CloudState:
    """A cloud at one time, in its rest frame; densities are those of simulated charges.

    count : simulated charges
    sizes : (3,) m, rms along its own axes, ascending
    density : 1/m^3; 0 where it has no volume
    spacing : m, (3/(4 pi density))^(1/3); infinite where it has no volume
    heat : J, kT of one real particle by eq. (1)
    lorentz : Gamma of the rest frame, by which its time goes slower
    """

    count: int
    sizes: tuple[float, float, float]
    density: float
    spacing: float
    heat: float
    lorentz: float


def cloud_state(own: Particles) -> CloudState | None:
    """The state of the charges of one cloud; None of few."""
    n = len(own)
    if n < LEAST:
        return None
    proper = own.velocity.mean(axis=1)
    lorentz = math.sqrt(1.0 + float(proper @ proper) / SPEED_OF_LIGHT**2)
    place = places_within(own.position, proper)
    velocity = velocities_within(own.velocity, proper)
    place = place - place.mean(axis=1, keepdims=True)
    velocity = velocity - velocity.mean(axis=1, keepdims=True)
    spread, mixed = place @ place.T / n, velocity @ place.T / n
    flow = mixed @ np.linalg.pinv(spread, rcond=1e-12, hermitian=True)
    rest = velocity - flow @ place
    free = max(n - 4, 1)  # the mean and the flow have been taken out
    heat = float(own.mass[0]) * float((rest**2).sum()) / (3.0 * free)
    sizes = np.sqrt(np.maximum(np.linalg.eigvalsh(spread), 0.0))
    volume = 4.0 / 3.0 * math.pi * math.prod((math.sqrt(5.0) * sizes).tolist())
    density = n / volume if volume > 0.0 else 0.0
    spacing = (3.0 / (4.0 * math.pi * density)) ** (1.0 / 3.0) if density > 0.0 else math.inf
    a, b, c = sizes.tolist()
    return CloudState(n, (a, b, c), density, spacing, heat, lorentz)
