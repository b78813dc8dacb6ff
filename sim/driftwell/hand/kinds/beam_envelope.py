"""How wide a beam with emittance is after a flight: the envelope equation of free space.

    R'' = K / R + eps^2 / R^3                                                                (1)

R is the edge of the uniform round beam with the same rms sizes (twice the rms size along one
axis), eps four times the rms emittance. It is followed by the classical Runge-Kutta rule.
"""

from __future__ import annotations

import math

from driftwell.answers.form import AXES, QuestionForm
from driftwell.answers.kinds.centre_and_size import RmsSize
from driftwell.answers.kinds.spot_size import SpotSize
from driftwell.forms import spelled
from driftwell.hand.beam import Beam, beam_of, flight_to, why_not_free
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.walls.plane import Plane

FORMULA = Formula(
    "envelope equation",
    "R'' = K/R + eps^2/R^3, R = 2 rms, eps = 4 rms emittance",
    "I. M. Kapchinskij and V. V. Vladimirskij (1959); F. J. Sacherer, IEEE Trans. Nucl. Sci. 18 "
    "(1971) 1105; M. Reiser (1994), eq. 4.191. From memory.",
    "a round beam much longer than wide, in free space; emittance kept",
)
_STEPS = 400


def envelope(beam: Beam, distance: float) -> float:
    """Edge after a distance by equation (1), m."""
    k, square = beam.perveance, beam.emittance**2

    def push(r: float) -> float:
        return k / r + square / r**3

    r, s, h = beam.edge, beam.slope, distance / _STEPS
    for _ in range(_STEPS):
        a, b = s, push(r)
        c, d = s + 0.5 * h * b, push(r + 0.5 * h * a)
        e, f = s + 0.5 * h * d, push(r + 0.5 * h * c)
        g, i = s + h * f, push(r + h * e)
        r += h / 6.0 * (a + 2.0 * c + 2.0 * e + g)
        s += h / 6.0 * (b + 2.0 * d + 2.0 * f + i)
    return r


def values(scene: Scene) -> Values:
    """Of every cloud that flies, at every detector across its way."""
    for group in scene.groups:
        beam = beam_of(group)
        if beam is None:
            continue
        for detector in scene.detectors:
            away = flight_to(beam, detector)
            if away is not None:
                what = f'rms size {group.named} along one axis at detector "{detector.name}"'
                yield _value(scene, beam, away, what)


def _value(scene: Scene, beam: Beam, away: float, what: str) -> HandValue:
    edge = envelope(beam, away)
    reasons = why_not_free(scene, beam, max(edge, beam.edge))
    why = "; ".join(reasons) or "a long beam by itself"
    start = spelled(0.5 * beam.edge, "m", 4)
    value = 0.5 * edge
    return HandValue(FORMULA, what, value, "m", not reasons, f"{start} at the start; {why}")


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The rms size across of a beam in free flight, at a time or on a detector."""
    if isinstance(question, RmsSize):
        return _of_size(question, scene)
    if isinstance(question, SpotSize):
        return _of_spot(question, scene)
    return None


def _of_size(question: RmsSize, scene: Scene) -> HandValue | None:
    group = scene.group(question.of)
    beam = None if group is None else beam_of(group)
    if beam is None or question.over is not None or question.at == "start":
        return None
    if not scene.fieldless or AXES.index(question.axis) == beam.axis:
        return None
    time = scene.scenario.duration if question.at == "end" else float(question.at)
    away = time * beam.group.speed
    if _stopped(scene, beam, away):
        return None
    return _value(scene, beam, away, f"rms size {beam.group.named}")


def _of_spot(question: SpotSize, scene: Scene) -> HandValue | None:
    if question.measure != "rms" or question.over is not None or len(scene.groups) != 1:
        return None
    beam = beam_of(scene.groups[0])
    detector = scene.detector(question.of)
    if beam is None or detector is None or not scene.fieldless:
        return None
    away = flight_to(beam, detector)
    if away is None or question.axis == AXES[beam.axis] or _stopped(scene, beam, away):
        return None
    found = _value(scene, beam, away, f'rms size of the spot on "{detector.name}"')
    if question.axis != "radius":
        return found
    both = math.sqrt(2.0) * found.value
    return HandValue(FORMULA, found.what, both, "m", found.inside, found.why)


def _stopped(scene: Scene, beam: Beam, away: float) -> bool:
    """Whether a wall may cut the bunch on its way: one that is no plane beyond it."""
    middle = float(beam.group.middle[beam.axis])
    reach = away + 0.5 * beam.length
    for wall in scene.scenario.wall:
        if not isinstance(wall, Plane) or abs(wall.normal[beam.axis]) < 0.999 * math.hypot(
            *wall.normal
        ):
            return True
        far = beam.sense * (wall.at[beam.axis] - middle)
        if -0.5 * beam.length < far < reach:
            return True
    return False


KIND = HandKind((FORMULA,), values, answer)
