"""Coupling parameter of a cloud, from its density and temperature at the start.

Gamma = q^2 / (4 pi eps0 a k T),   a = (3 / (4 pi n))^(1/3)                              (1)
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.plasma import CouplingParameter
from driftwell.constants import BOLTZMANN, COULOMB_CONSTANT
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "coupling parameter",
    "Gamma = q^2/(4 pi eps0 a k T), a = (3/(4 pi n))^(1/3)",
    "S. Ichimaru, Rev. Mod. Phys. 54 (1982) 1017. From memory.",
    "charges in equilibrium at a temperature; above 1 they order, near 172 an endless cloud "
    "freezes",
)


def coupling(density: float, kelvin: float, charge: float) -> float:
    """Equation (1); density in 1/m^3, charge in C."""
    spacing = math.pow(3.0 / (4.0 * math.pi * density), 1.0 / 3.0)
    return COULOMB_CONSTANT * charge**2 / (spacing * BOLTZMANN * kelvin)


def values(scene: Scene) -> Values:
    """That of every warm cloud that fills a volume."""
    for group in scene.groups:
        if group.solid and group.temperature > 0.0:
            yield _value(group, group.peak_density)


def _value(group: Group, density: float) -> HandValue:
    found = coupling(density, group.temperature, group.body.charge)
    if found < 1.0:
        why = "a gas: charges meet one by one"
    elif group.weight == 1.0:
        why = "coupled: charges put down at random heat up as they order"
    else:
        why = (
            f"coupled, and each simulated charge stands for {group.weight:.6g}: its own coupling "
            f"is {group.weight ** (2.0 / 3.0):.3g} times as large"
        )
    return HandValue(FORMULA, f"coupling parameter {group.named}", found, "1", found < 1.0, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At the start, of a cloud whose shape says its density."""
    asked = scene.warm_start(question) if isinstance(question, CouplingParameter) else None
    return None if asked is None else _value(*asked)


KIND = HandKind((FORMULA,), values, answer)
