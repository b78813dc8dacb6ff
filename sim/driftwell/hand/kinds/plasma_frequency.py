"""Plasma frequency of a cloud, from its density at the start.

f_p = sqrt(n q^2 / (eps0 m)) / (2 pi)                                                    (1)
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.plasma import PlasmaFrequency
from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.forms.body import Body
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "plasma frequency",
    "f_p = (n q^2/(eps0 m))^(1/2)/(2 pi)",
    "L. Tonks and I. Langmuir, Phys. Rev. 33 (1929) 195; NRL Plasma Formulary (2019). From memory.",
    "many charges in a Debye length, or a cold cloud; n that of real particles of one kind",
)
FEW = 20
"""Fewer charges are no plasma."""


def plasma_frequency(density: float, body: Body) -> float:
    """Equation (1), Hz; density in 1/m^3."""
    square = density * body.charge**2 / (ELECTRIC_CONSTANT * body.mass)
    return math.sqrt(square) / (2.0 * math.pi)


def values(scene: Scene) -> Values:
    """That of every cloud that fills a volume."""
    for group in scene.groups:
        if group.solid:
            where = "at its densest place" if group.peak_known else "as a uniform ellipsoid"
            yield _value(group, group.peak_density, where)


def _value(group: Group, density: float, where: str) -> HandValue:
    inside = group.number >= FEW
    why = f"{group.number:.6g} real particles, {density:.4g} 1/m^3 {where} at the start"
    return HandValue(
        FORMULA,
        f"plasma frequency {group.named}",
        plasma_frequency(density, group.body),
        "Hz",
        inside,
        why if inside else f"{why}: too few for a plasma",
    )


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At the start, of a cloud whose shape says its density."""
    if not isinstance(question, PlasmaFrequency) or question.at != "start":
        return None
    group = scene.group(question.of)
    if group is None or not group.solid or not group.peak_known:
        return None
    if question.density == "uniform":
        return _value(group, group.uniform_density, "as a uniform ellipsoid")
    return _value(group, group.peak_density, "at its densest place")


KIND = HandKind((FORMULA,), values, answer)
