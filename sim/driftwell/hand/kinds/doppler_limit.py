"""The temperature Doppler cooling comes to.

    k T_D = hbar Gamma / 2,   Gamma = 2 pi linewidth                                         (1)

the least, of a two-level ion at low saturation with a detuning of half a linewidth to the red.
"""

from __future__ import annotations

import math

from scipy.constants import hbar

from driftwell.constants import BOLTZMANN
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.processes.laser_cooling import LaserCooling

FORMULA = Formula(
    "Doppler limit",
    "k T = hbar Gamma/2",
    "D. J. Wineland and W. M. Itano, Phys. Rev. A 20 (1979) 1521; D. J. Wineland and H. Dehmelt, "
    "Bull. Am. Phys. Soc. 20 (1975) 637. From memory.",
    "low saturation, detuned by half a linewidth to the red, heat carried off along all axes; "
    "else it is hotter",
)
LOW = 0.1
"""Saturation up to which it is low."""


def doppler_temperature(linewidth: float) -> float:
    """Equation (1), K; linewidth in Hz."""
    return 0.5 * hbar * 2.0 * math.pi * linewidth / BOLTZMANN


def values(scene: Scene) -> Values:
    """Of every linewidth among the beams."""
    beams = [p for p in scene.scenario.process if isinstance(p, LaserCooling)]
    for width in dict.fromkeys(beam.linewidth for beam in beams):
        own = [beam for beam in beams if beam.linewidth == width]
        reasons = []
        if max(beam.saturation for beam in own) > LOW:
            reasons.append("saturation heats")
        if any(abs(beam.detuning / width + 0.5) > 0.1 for beam in own):
            reasons.append("detuned otherwise than by half a linewidth to the red")
        if len(scene.scenario.field) == 0 and not scene.scenario.electrode:
            reasons.append("nothing holds the ions")
        names = ", ".join(beam.name for beam in own)
        yield HandValue(
            FORMULA,
            f"least temperature by {names}",
            doppler_temperature(width),
            "K",
            not reasons,
            "; ".join(reasons) or "low saturation, half a linewidth to the red",
        )


KIND = HandKind((FORMULA,), values)
