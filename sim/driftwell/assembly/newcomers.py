"""How fast charges will move that are born on the way: what the automatic step must know of them.

A stream of current density J that leaves a surface of size L at the speed v is followed by its own
plasma frequency; one that leaves slowly by the rate at which it is driven apart:

    omega^2 = |q| J/(m eps0 v),    omega^3 = |q| J/(m eps0 L)                               (1)

of which the smaller serves: the left one grows without bound for charges at rest, which leave the
place behind before it matters. From a point charges come one after the other, each at a distance
v/(births a second) from the one before, and turn about each other as a pair at that distance does.
"""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np

from driftwell.constants import COULOMB_CONSTANT, ELECTRIC_CONSTANT
from driftwell.geometry.solid import Solid
from driftwell.particles.source import Setting, Source
from driftwell.particles.state import Particles
from driftwell.stepping.step_choice import Rate

Emitting = tuple[Source, Sequence[Solid], Particles]
"""A source, the bodies of the electrode it is on, and the charges it bears, in order of time."""


def source_rates(emitting: Sequence[Emitting], setting: Setting, softening: float) -> list[Rate]:
    """Rates of all sources; softening : m, of the pairs."""
    return [
        Rate(f'charges of source "{source.name}" among each other', rate)
        for source, solids, born in emitting
        if (rate := _rate(source, solids, born, setting, softening)) > 0.0
    ]


def _rate(
    source: Source,
    solids: Sequence[Solid],
    born: Particles,
    setting: Setting,
    softening: float,
) -> float:
    body, density = setting.bodies[source.species], source.density(setting, solids)
    if density == 0.0 or not len(born):
        return 0.0
    ratio = abs(body.charge) / body.mass
    speed = float(np.sqrt((born.velocity**2).sum(axis=0).mean()))
    if math.isinf(density):
        apart = speed * float(born.birth_time[-1] - born.birth_time[0]) / max(len(born) - 1, 1)
        if apart == 0.0:
            return 0.0
        pushed = 2.0 * COULOMB_CONSTANT * abs(body.charge) * float(born.weight[0]) * ratio
        return math.sqrt(pushed / (apart**2 + softening**2) ** 1.5)
    driven = float(np.cbrt(ratio * density / (ELECTRIC_CONSTANT * source.emitter.extent(solids))))
    if speed == 0.0:
        return driven
    return min(driven, math.sqrt(ratio * density / (ELECTRIC_CONSTANT * speed)))
