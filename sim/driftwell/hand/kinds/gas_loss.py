"""How long ions last in a gas that neutralises them.

    N(t) = N0 exp(-t / tau),   1/tau = p n k_L                                               (1)

with the share p of collisions that neutralise. Hard spheres collide the more often the faster the
ion is; at the gas's temperature 1/tau = p n sigma <g>.
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.fractions import FractionLeft
from driftwell.answers.kinds.lifetime import Lifetime
from driftwell.forms.body import Body
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.collision_time import collision_rate
from driftwell.hand.kinds.rf_trap import body_of
from driftwell.hand.scene import Scene
from driftwell.processes.gas_collisions import GasCollisions, InducedDipole

FORMULA = Formula(
    "exponential loss to a gas",
    "N = N0 exp(-t/tau), 1/tau = p n k_L",
    "P. Langevin, Ann. Chim. Phys. 5 (1905) 245 for the rate. From memory.",
    "a rate that no speed changes (induced dipole), gas everywhere, no other loss",
)


def values(scene: Scene) -> Values:
    """Of every species in a gas that neutralises."""
    for gas in scene.scenario.process:
        if isinstance(gas, GasCollisions) and gas.loss > 0.0:
            for body in scene.kinds:
                yield _lifetime(gas, body)


def _lifetime(gas: GasCollisions, body: Body) -> HandValue:
    inside = isinstance(gas.collision, InducedDipole) and gas.region is None
    why = "the same rate at every speed" if inside else "the rate depends on speed, or on the place"
    value = 1.0 / (gas.loss * collision_rate(gas, body))
    what = f'lifetime of {body.name} in "{gas.name}"'
    return HandValue(FORMULA, what, value, "s", inside, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The part left of a cloud, or its lifetime, where only the gas takes charges."""
    if not isinstance(question, FractionLeft | Lifetime):
        return None
    body, scenario = body_of(scene, question.of), scene.scenario
    taking = [
        p
        for p in scenario.process
        if p.takes_charges() and body is not None and p.acts_on(question.of, body.name)
    ]
    if body is None or scenario.wall or scenario.electrode or len(taking) != 1:
        return None
    gas = taking[0]
    if not isinstance(gas, GasCollisions) or scene.group(question.of) is None:
        return None
    if gas.end is not None or gas.start > 0.0:
        return None
    found = _lifetime(gas, body)
    if not found.inside:
        return None
    if isinstance(question, Lifetime):
        return found
    time = (
        scenario.duration
        if question.at == "end"
        else float(question.at)
        if question.at != "start"
        else 0.0
    )
    left = math.exp(-time / found.value)
    return HandValue(FORMULA, f'part of cloud "{question.of}" left', left, "1", True, found.why)


KIND = HandKind((FORMULA,), values, answer)
