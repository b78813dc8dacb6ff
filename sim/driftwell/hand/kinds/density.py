"""Density of a cloud at its densest place, from its shape.

Gaussian    n = N / ((2 pi)^(3/2) sx sy sz)                                              (1)
evenly      n = N / volume                                                               (2)
"""

from __future__ import annotations

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.peak_density import PeakDensity
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "density of a shape",
    "Gaussian: n = N/((2 pi)^(3/2) s_x s_y s_z); filled evenly: n = N/volume",
    "elementary; the normal distribution",
    "the cloud as it is put down, before it moves",
)


def values(scene: Scene) -> Values:
    """That of every cloud whose shape says it."""
    for group in scene.groups:
        if group.solid and group.peak_known:
            yield _value(group)


def _value(group: Group) -> HandValue:
    # the shape counts lengths in the laboratory
    density = group.peak_density * group.lorentz
    why = f"{group.number:.6g} real particles, as they are put down"
    return HandValue(FORMULA, f"peak density {group.named}", density, "1/m^3", True, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At the start."""
    if not isinstance(question, PeakDensity) or question.at != "start":
        return None
    group = scene.group(question.of)
    return None if group is None or not (group.solid and group.peak_known) else _value(group)


KIND = HandKind((FORMULA,), values, answer)
