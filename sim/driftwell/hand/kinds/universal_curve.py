"""How wide a cold parallel beam is at a detector: the universal curve of beam spread.

    R'' = K / R,   z sqrt(2 K) / R0 = 2 chi D(sqrt(ln chi)),   chi = R / R0                   (1)

with Dawson's function D. It is solved for chi by Newton's rule.
"""

from __future__ import annotations

import math

from driftwell.forms import spelled
from driftwell.hand.beam import beam_of, flight_to, why_not_free
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "universal beam-spread curve",
    "z (2 K)^(1/2)/R0 = 2 chi D((ln chi)^(1/2)), chi = R/R0",
    "M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.3; Dawson's function: "
    "M. Abramowitz and I. Stegun, 7.1.17. From memory.",
    "a uniform round beam, cold and parallel at the start, much longer than wide, in free space",
)
COLD = 0.1
"""Part of the space-charge term that emittance or slope may be."""
_TURNS = 60


def spread(perveance: float, edge: float, distance: float) -> float:
    """Edge after a distance by equation (1), m."""
    from scipy.special import dawsn

    wanted = distance * math.sqrt(2.0 * perveance) / edge
    root = min(0.5 * wanted, 2.0)  # of ln chi
    for _ in range(_TURNS):
        chi = math.exp(root**2)
        found = 2.0 * chi * float(dawsn(root))
        change = (found - wanted) / (
            2.0 * chi
        )  # d/d root of 2 exp(root^2) D(root) is 2 exp(root^2)
        root = max(root - change, 0.25 * root)
        if abs(change) < 1e-14 * max(root, 1.0):
            break
    return edge * math.exp(root**2)


def values(scene: Scene) -> Values:
    """Of every cloud that flies, at every detector across its way."""
    for group in scene.groups:
        beam = beam_of(group)
        if beam is None or beam.perveance <= 0.0:
            continue
        hot = []
        thermal = beam.emittance**2 / beam.edge**2
        if thermal > COLD * beam.perveance:
            hot.append(f"its emittance is {thermal / beam.perveance:.2g} of its perveance")
        for detector in scene.detectors:
            away = flight_to(beam, detector)
            if away is None:
                continue
            value = spread(beam.perveance, beam.edge, away)
            if not math.isfinite(value):
                continue
            reasons = [*why_not_free(scene, beam, value), *hot]
            why = "; ".join(reasons) or "a long beam by itself"
            yield HandValue(
                FORMULA,
                f'edge {group.named} at detector "{detector.name}"',
                value,
                "m",
                not reasons,
                f"{spelled(beam.edge, 'm', 4)} at the start; {why}",
            )


KIND = HandKind((FORMULA,), values)
