"""Cyclotron frequency and radius of charges in a uniform magnet.

f_c = |q| B / (2 pi gamma m),   r = gamma m v_perp / (|q| B)                             (1)
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.fields.uniform_magnetic import UniformMagnetic
from driftwell.forms.waveforms import largest_value
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FREQUENCY = Formula(
    "cyclotron frequency",
    "f_c = |q| B/(2 pi gamma m)",
    "J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 12.2",
    "a uniform magnet; electric fields shift it",
)
RADIUS = Formula(
    "Larmor radius",
    "r = gamma m v/(|q| B), v across the magnet",
    "J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 12.2",
    "a uniform magnet; electric fields add a drift",
)


def values(scene: Scene) -> Values:
    """Of every cloud in a uniform magnet."""
    magnets = [f for f in scene.scenario.field if isinstance(f, UniformMagnetic)]
    if len(magnets) != 1:
        return
    flux = largest_value(magnets[0].strength)
    if flux == 0.0:
        return
    others = len(scene.scenario.field) > 1 or bool(scene.scenario.electrode)
    why = "electric fields act besides" if others else "nothing else acts"
    for group in scene.groups:
        rate = abs(group.body.charge) * flux / (group.body.mass * group.lorentz)
        yield HandValue(
            FREQUENCY,
            f"cyclotron frequency {group.named}",
            rate / (2.0 * math.pi),
            "Hz",
            not others,
            why,
        )
        across = speed_across(group, np.array(magnets[0].along))
        if across > 0.0:
            radius = across * group.body.mass / (abs(group.body.charge) * flux)
            yield HandValue(RADIUS, f"Larmor radius {group.named}", radius, "m", not others, why)


def speed_across(group: Group, along: np.ndarray) -> float:
    """Rms proper speed across a direction: of drift and heat, m/s."""
    drift = group.drift - along * float(along @ group.drift)
    heat = 2.0 * BOLTZMANN * group.temperature / group.body.mass
    return math.sqrt(float(drift @ drift) + min(heat, SPEED_OF_LIGHT**2))


KIND = HandKind((FREQUENCY, RADIUS), values)
