"""Debye length of a cloud, from its density and temperature at the start.

lambda_D = sqrt(eps0 k T / (n q^2))                                                      (1)
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.plasma import DebyeLength
from driftwell.constants import BOLTZMANN, ELECTRIC_CONSTANT
from driftwell.forms import spelled
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "Debye length",
    "lambda_D = (eps0 k T/(n q^2))^(1/2)",
    "P. Debye and E. Hueckel, Phys. Z. 24 (1923) 185; NRL Plasma Formulary (2019). From memory.",
    "weak coupling (Gamma below 1), and shorter than the cloud: else nothing is screened",
)


def debye_length(density: float, kelvin: float, charge: float) -> float:
    """Equation (1), m; density in 1/m^3, charge in C."""
    return math.sqrt(ELECTRIC_CONSTANT * BOLTZMANN * kelvin / (density * charge**2))


def values(scene: Scene) -> Values:
    """That of every warm cloud that fills a volume."""
    for group in scene.groups:
        if group.solid and group.temperature > 0.0:
            yield _value(group, group.peak_density)


def _value(group: Group, density: float) -> HandValue:
    length = debye_length(density, group.temperature, group.body.charge)
    # Gamma = a^2 / (3 lambda_D^2)
    coupling = (3.0 / (4.0 * math.pi * density)) ** (2.0 / 3.0) / (3.0 * length**2)
    size = min(group.size)
    inside = coupling < 1.0 and length < size
    why = (
        f"{density:.4g} 1/m^3 and {spelled(group.temperature, 'K', 4)} at the start; smallest rms "
        f"size {spelled(size, 'm', 3)}, Gamma {coupling:.2g}"
    )
    return HandValue(FORMULA, f"Debye length {group.named}", length, "m", inside, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At the start, of a cloud whose shape says its density."""
    asked = scene.warm_start(question) if isinstance(question, DebyeLength) else None
    return None if asked is None else _value(*asked)


KIND = HandKind((FORMULA,), values, answer)
