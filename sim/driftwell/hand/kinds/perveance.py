"""Generalised perveance of a beam.

K = 2 I / (I0 (beta gamma)^3),   I0 = 4 pi eps0 m c^3 / |q|                              (1)
"""

from __future__ import annotations

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.perveance import GeneralisedPerveance
from driftwell.forms import spelled
from driftwell.hand.beam import LONG, Beam, beam_of
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "generalised perveance",
    "K = 2 I/(I0 (beta gamma)^3), I0 = 4 pi eps0 m c^3/|q|",
    "M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.2. From memory.",
    "a beam much longer than wide, of one kind, not neutralised",
)


def values(scene: Scene) -> Values:
    """Of every cloud that flies."""
    for group in scene.groups:
        beam = beam_of(group)
        if beam is not None:
            yield _value(beam)


def _value(beam: Beam) -> HandValue:
    ratio = beam.length / beam.edge
    why = f"{spelled(beam.current, 'A', 3)} in the bunch, {ratio:.3g} times as long as its radius"
    what = f"generalised perveance {beam.group.named}"
    return HandValue(FORMULA, what, beam.perveance, "1", ratio >= LONG, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At a detector, of the only cloud, in free flight: the question takes a mean current."""
    if not isinstance(question, GeneralisedPerveance) or len(scene.groups) != 1:
        return None
    beam = beam_of(scene.groups[0])
    if beam is None or not scene.fieldless or beam.length < LONG * beam.edge:
        return None
    detector = scene.detector(question.of)
    if detector is None:
        return None
    # the window must lie where the middle of the bunch passes
    speed = beam.group.speed
    away = beam.sense * (detector.at[beam.axis] - float(beam.group.middle[beam.axis]))
    first, last = (away + side * 0.4 * beam.length for side in (-1.0, 1.0))
    if not first / speed <= question.over[0] < question.over[1] <= last / speed:
        return None
    return _value(beam)


KIND = HandKind((FORMULA,), values, answer)
