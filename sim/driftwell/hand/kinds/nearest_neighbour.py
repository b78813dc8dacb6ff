"""Mean distance to the nearest neighbour among charges put down at random.

<r> = Gamma(4/3) (4 pi n / 3)^(-1/3) = 0.55396 n^(-1/3)                                  (1)
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.nearest_neighbour import NearestNeighbour
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "Hertz's mean distance of neighbours",
    "<r> = Gamma(4/3) (4 pi n/3)^(-1/3)",
    "P. Hertz, Math. Ann. 67 (1909) 387; S. Chandrasekhar, Rev. Mod. Phys. 15 (1943) 1, eq. 676. "
    "From memory.",
    "places independent of each other, density the same throughout, far from the edge; n counts "
    "simulated charges",
)
MANY = 1000
"""Charges from which few are at the edge."""


def mean_distance(density: float) -> float:
    """Equation (1), m; density in 1/m^3."""
    return math.gamma(4.0 / 3.0) * math.pow(4.0 * math.pi * density / 3.0, -1.0 / 3.0)


def values(scene: Scene) -> Values:
    """Of every cloud that is filled evenly at random."""
    for group in scene.groups:
        if _random(group):
            yield _value(group, scene)


def _random(group: Group) -> bool:
    return group.solid and group.even and getattr(group.form.shape, "placing", "") == "random"


def _value(group: Group, scene: Scene) -> HandValue:
    density = group.peak_density * group.lorentz / group.weight
    alone = len(scene.groups) == 1
    inside = alone and group.count >= MANY
    why = f"{group.count} charges put down at random"
    if not alone:
        why += "; other clouds may lie between them"
    elif not inside:
        why += f": below {MANY} the edge makes it larger, by some percent"
    what = f"distance of nearest neighbours {group.named}"
    return HandValue(FORMULA, what, mean_distance(density), "m", inside, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """At the start."""
    if not isinstance(question, NearestNeighbour) or question.at != "start":
        return None
    group = scene.group(question.of)
    return None if group is None or not _random(group) else _value(group, scene)


KIND = HandKind((FORMULA,), values, answer)
