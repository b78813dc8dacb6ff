"""Frequency along the axis of a static well without magnet.

    f = sqrt(k_z) / (2 pi),   k_z = q/m d^2 phi / dz^2                                       (1)

of a static quadrupole beside RF rods (whose own push has no part along z), and of a
quadro-logarithmic well, where it does not depend on any amplitude.
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.frequency import Frequency
from driftwell.fields.quadro_logarithmic import QuadroLogarithmic
from driftwell.forms.body import Body
from driftwell.hand.among_others import shifted_by_others
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.rf_trap import body_of
from driftwell.hand.scene import Scene
from driftwell.hand.trap import at_start

FORMULA = Formula(
    "axial frequency of a quadro-logarithmic well",
    "f = (k q/m)^(1/2)/(2 pi)",
    "K. H. Kingdon, Phys. Rev. 21 (1923) 408; R. D. Knight, Appl. Phys. Lett. 38 (1981) 221. From "
    "memory.",
    "one charge, any amplitude; or the centre of a cloud of one kind",
)


def values(scene: Scene) -> Values:
    """Of every species in such a well."""
    for body in scene.kinds:
        found = _value(scene, body)
        if found is not None:
            yield found


def _value(scene: Scene, body: Body) -> HandValue | None:
    wells = [f for f in scene.scenario.field if isinstance(f, QuadroLogarithmic)]
    if not wells:
        return None
    level = at_start(wells[0].curvature)
    if level is None or level * body.charge <= 0.0:
        return None
    alone = len(scene.scenario.field) == 1 and not scene.scenario.electrode
    why = "nothing else acts" if alone else "other fields act besides"
    value = math.sqrt(level * body.charge_to_mass) / (2.0 * math.pi)
    return HandValue(FORMULA, f"axial frequency of {body.name}", value, "Hz", alone, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The frequency along z."""
    if not isinstance(question, Frequency) or question.axis != "z":
        return None
    body = body_of(scene, question.of)
    found = None if body is None else _value(scene, body)
    if found is None:
        return None
    if question.near is not None and abs(question.near / found.value - 1.0) > 0.1:
        return None
    return shifted_by_others(question, scene, found)


KIND = HandKind((FORMULA,), values, answer)
