"""The most current that a plane gap passes from a surface at rest.

J = (4 eps0 / 9) sqrt(2 |q| / m) V^(3/2) / d^2                                            (1)
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.current import Current
from driftwell.answers.kinds.perveance import Perveance
from driftwell.constants import BOLTZMANN, ELECTRIC_CONSTANT, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from driftwell.fields.gridded_gap import GriddedGap
from driftwell.forms.body import Body
from driftwell.forms.waveforms import largest_value
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.hand.trap import steady
from driftwell.particles.source import Source

FORMULA = Formula(
    "Child-Langmuir law",
    "J = (4 eps0/9) (2 |q|/m)^(1/2) V^(3/2)/d^2",
    "C. D. Child, Phys. Rev. 32 (1911) 492; I. Langmuir, Phys. Rev. 2 (1913) 450; NRL Plasma "
    "Formulary (2019). From memory.",
    "a plane gap, emission without limit at no speed, slow against light; a disc of the gap's "
    "own width passes more at its edge",
)
WIDE = 5.0
"""Radius over gap from which the edge counts little."""
SLOW = 0.02
"""Energy over rest energy up to which (1) holds."""


def current_density(volts: float, gap: float, body: Body) -> float:
    """Equation (1), A/m^2."""
    speed = math.sqrt(2.0 * abs(body.charge_to_mass))
    return 4.0 / 9.0 * ELECTRIC_CONSTANT * speed * math.pow(volts, 1.5) / gap**2


def values(scene: Scene) -> Values:
    """Of every source on a surface at the first grid of a gap."""
    for source in scene.scenario.source:
        found = _value(scene, source)
        if found is not None:
            yield found


def _value(scene: Scene, source: Source) -> HandValue | None:
    gaps = [f for f in scene.scenario.field if isinstance(f, GriddedGap)]
    if len(gaps) != 1 or not source.emitter.has_area() or source.emitter.electrode_named():
        return None
    gap, body = gaps[0], scene.bodies[source.species]
    area = source.emitter.area(())
    volts = largest_value(gap.voltage)
    if area <= 0.0 or volts <= 0.0:
        return None
    limit = area * current_density(volts, gap.length, body)
    reasons = []
    radius = math.sqrt(area / math.pi)
    if radius < WIDE * gap.length:
        reasons.append(
            f"the surface is {radius / gap.length:.2g} gaps in radius: more passes at its edge"
        )
    energy = abs(body.charge) * volts
    if energy > SLOW * body.mass * SPEED_OF_LIGHT**2:
        reasons.append("the charges become too fast")
    kelvin = source.emission_temperature or 0.0
    if BOLTZMANN * kelvin > 1e-3 * energy:
        reasons.append(f"heat of {BOLTZMANN * kelvin / ELEMENTARY_CHARGE:.2g} eV lets more pass")
    if scene.scenario.process:
        reasons.append("a gas slows the charges: far less passes")
    if source.motion is not None and source.motion.directed():
        reasons.append("they leave with a speed of their own")
    if not steady(gap.voltage):
        reasons.append("the voltage changes")
    why = "; ".join(reasons) or "a wide plane gap"
    if source.current is not None:
        why = f"{largest_value(source.current) / limit:.3g} of it is supplied; {why}"
    what = f'most current of source "{source.name}"'
    return HandValue(FORMULA, what, limit, "A", not reasons, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """Current, or current over voltage to the power 3/2, of a source that space charge limits."""
    if not isinstance(question, Current | Perveance) or len(scene.scenario.source) != 1:
        return None
    source = scene.scenario.source[0]
    if not source.space_charge_limited or scene.groups:
        return None
    found = _value(scene, source)
    if found is None:
        return None
    gap = next(f for f in scene.scenario.field if isinstance(f, GriddedGap))
    volts = largest_value(gap.voltage)
    if isinstance(question, Perveance):
        value, unit = found.value / volts**1.5, "A/V^1.5"
    else:
        sign = math.copysign(1.0, scene.bodies[source.species].charge)
        detector = scene.detector(question.of)
        if detector is None:
            return None
        along = sum(a * b for a, b in zip(gap.along, detector.normal, strict=True))
        value, unit = math.copysign(found.value, sign * along), "A"
    return HandValue(FORMULA, found.what, value, unit, found.inside, found.why)


KIND = HandKind((FORMULA,), values, answer)
