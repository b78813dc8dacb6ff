"""How long a flat pulse becomes on its way: sheets that push each other apart.

    evenly filled    w = w0 + a t^2                                                          (1)
    Gaussian         s^2 = s0^2 + a t^2 s0 / sqrt(pi) + (a t^2 / 2)^2 / 3                    (2)
    a = |q| sigma / (2 eps0 m),   sigma = |Q| / A

w is the full length, s the rms length; every layer feels a constant force and keeps its order. A
is the area of the evenly filled disc with the same rms radius. In flight lengths and times count in
the pulse's own frame: t/gamma, and gamma times the length.
"""

from __future__ import annotations

import math

from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.forms import spelled
from driftwell.hand.beam import Beam, beam_of, flight_to
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.particles.shapes.gaussian import Gaussian

FORMULA = Formula(
    "spread of a flat pulse",
    "w = w0 + a t^2 evenly filled; s^2 = s0^2 + a t^2 s0/pi^(1/2) + (a t^2/2)^2/3 Gaussian; "
    "a = |q| Q/(2 eps0 m A)",
    "Gauss's law; B. J. Siwick, J. R. Dwyer, R. E. Jordan and R. J. D. Miller, J. Appl. Phys. 92 "
    "(2002) 1643 (mean field). From memory.",
    "a pulse cold along its way, all the while several times wider than long; an upper bound "
    "beyond that",
)
FLAT = 5.0
"""Radius over length from which a pulse is flat."""


def acceleration(charge: float, area: float, ratio: float) -> float:
    """a of the equations, m/s^2; charge in C, ratio : |q|/m."""
    return ratio * abs(charge) / area / (2.0 * ELECTRIC_CONSTANT)


def rms_length(start: float, push: float, time: float, gaussian: bool) -> float:
    """Equation (1) or (2), rms, m; start : rms length, m; push : a, m/s^2."""
    if gaussian:
        moved = push * time**2
        square = start**2 + moved * start / math.sqrt(math.pi) + (0.5 * moved) ** 2 / 3.0
        return math.sqrt(square)
    return start + push * time**2 / math.sqrt(12.0)


def values(scene: Scene) -> Values:
    """The rms duration of every cloud that flies, at every detector across its way."""
    for group in scene.groups:
        beam = beam_of(group)
        if beam is None or beam.length > beam.edge * FLAT:
            continue
        for detector in scene.detectors:
            away = flight_to(beam, detector)
            if away is not None:
                yield _value(scene, beam, away, detector.name)


def _value(scene: Scene, beam: Beam, away: float, detector: str) -> HandValue:
    group = beam.group
    gamma = group.lorentz
    push = acceleration(group.charge, math.pi * beam.edge**2, abs(group.body.charge_to_mass))
    own = away / group.speed / gamma
    start = gamma * group.size[beam.axis]
    gaussian = isinstance(group.form.shape, Gaussian)
    length = rms_length(start, push, own, gaussian)
    reasons = []
    if math.sqrt(12.0) * length * FLAT > beam.edge:
        reasons.append(
            f"the pulse becomes {spelled(math.sqrt(12.0) * length, 'm', 3)} long at "
            f"{spelled(beam.edge, 'm', 3)} radius: an upper bound"
        )
    if not scene.fieldless or not scene.alone(group):
        reasons.append("something else acts on it")
    what = f'rms duration {group.named} at "{detector}"'
    why = "; ".join(reasons) or "a flat pulse by itself"
    return HandValue(FORMULA, what, length / gamma / group.speed, "s", not reasons, why)


KIND = HandKind((FORMULA,), values)
