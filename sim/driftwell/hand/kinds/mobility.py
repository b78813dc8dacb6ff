"""Mobility of ions in a gas at low field, and the damping it means.

    K = 3 |q| / (16 n) (2 pi / (mu k T))^(1/2) / sigma     hard spheres                      (1)
    K = |q| / (mu n k_L)                                   induced dipole                    (2)
    1/tau = |q| / (m K)                                                                      (3)

(2) is that of a capture which turns the relative velocity to any direction alike, as this program
collides; the dipole's own scattering law makes it 10 % different.
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.mobility import STANDARD_DENSITY, Mobility
from driftwell.constants import BOLTZMANN
from driftwell.forms.body import Body
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.collision_time import collision_rate, reduced_mass
from driftwell.hand.kinds.rf_trap import body_of
from driftwell.hand.scene import Scene
from driftwell.processes.gas_collisions import GasCollisions, HardSphere
from driftwell.processes.mobility_drag import MobilityDrag

MASON = Formula(
    "Mason-Schamp mobility",
    "K = 3 |q|/(16 n sigma) (2 pi/(mu k T))^(1/2)",
    "E. A. Mason and E. W. McDaniel, Transport Properties of Ions in Gases (1988), sec. 5-6; "
    "H. E. Revercomb and E. A. Mason, Anal. Chem. 47 (1975) 970. From memory.",
    "weak field: drift slow against the gas's heat; first order, low by 2 % for ions as heavy as "
    "the gas and by 13 % for much lighter ones",
)
CAPTURE = Formula(
    "mobility of isotropic capture",
    "K = |q|/(mu n k_L), k_L Langevin's",
    "momentum transfer at a constant rate: E. A. Mason and E. W. McDaniel (1988), sec. 5-2. From "
    "memory.",
    "collisions at Langevin's rate that scatter to all directions alike; any field",
)
DAMPING = Formula(
    "damping time by mobility",
    "tau = m K/|q|",
    "E. A. Mason and E. W. McDaniel, Transport Properties of Ions in Gases (1988), ch. 1. From "
    "memory.",
    "slow ions; it is the time in which a drift decays to 1/e",
)
WEAK = 0.1
"""Part of the gas's own heat that the drift's energy may be."""


def mobility(gas: GasCollisions, body: Body) -> float:
    """Equation (1) or (2), m^2/(V s)."""
    mu, n = reduced_mass(gas, body), gas.density()
    if isinstance(gas.collision, HardSphere):
        root = math.sqrt(2.0 * math.pi / (mu * BOLTZMANN * gas.temperature))
        return 3.0 * abs(body.charge) * root / (16.0 * n * gas.collision.cross_section)
    return abs(body.charge) / (mu * collision_rate(gas, body))


def values(scene: Scene) -> Values:
    """Of every species in every gas that acts on it."""
    for gas in scene.scenario.process:
        if not isinstance(gas, GasCollisions):
            continue
        for body in scene.kinds:
            found = _value(scene, gas, body, None)
            if found is None:
                continue
            yield found
            tau = body.mass * found.value / abs(body.charge)
            what = f'damping time of {body.name} in "{gas.name}"'
            yield HandValue(DAMPING, what, tau, "s", found.inside, found.why)


def _value(scene: Scene, gas: GasCollisions, body: Body, field: float | None) -> HandValue | None:
    acts = [
        gas.acts_on(each.name, each.species) for each in scene.moving if each.species == body.name
    ]
    if not any(acts):
        return None
    reasons = []
    value = mobility(gas, body)
    spheres = isinstance(gas.collision, HardSphere)
    if gas.exchange or gas.loss:
        reasons.append("some collisions exchange or take the charge")
    if field is not None and spheres:
        hot = gas.mass * (value * field) ** 2 / (3.0 * BOLTZMANN * gas.temperature)
        if hot > WEAK:
            reasons.append(f"the drift heats the ions by {hot:.2g} of the gas's temperature")
    light = body.mass < 2.0 * gas.mass
    why = "; ".join(reasons) or ("weak field" if spheres else "any field")
    if spheres and light:
        why += "; the ions are no heavier than twice the gas: low by some percent"
    formula = MASON if spheres else CAPTURE
    what = f'mobility of {body.name} in "{gas.name}"'
    return HandValue(formula, what, value, "m^2/(V s)", not reasons, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The mobility, or at standard density, where one gas acts through the whole stretch."""
    if not isinstance(question, Mobility):
        return None
    body = body_of(scene, question.of)
    acting = [p for p in scene.scenario.process if body and p.acts_on(question.of, body.name)]
    if body is None or len(acting) != 1:
        return None
    gas = acting[0]
    whole = (
        gas.region is None
        and gas.start <= question.over[0]
        and (gas.end is None or gas.end >= question.over[1])
    )
    if not whole or any(getattr(gas, "flow", ())):
        return None
    if isinstance(gas, MobilityDrag):
        return None  # it is what the scenario states
    if not isinstance(gas, GasCollisions):
        return None
    found = _value(scene, gas, body, abs(question.field))
    if found is None or not question.reduced or question.pressure is None:
        return found
    assert question.temperature is not None
    density = question.pressure / (BOLTZMANN * question.temperature)
    reduced = found.value * density / STANDARD_DENSITY
    return HandValue(found.formula, found.what, reduced, found.unit, found.inside, found.why)


KIND = HandKind((MASON, CAPTURE, DAMPING), values, answer)
