"""A ball of one kind of charge that flies apart from rest.

    R'' = q Q / (4 pi eps0 m R^2),   R = R0 chi                                              (1)
    t = sqrt(R0^3 / (2 A)) [sqrt(chi (chi - 1)) + ln(sqrt(chi) + sqrt(chi - 1))],
        A = q Q / (4 pi eps0 m)                                                              (2)

An evenly filled ball stays one: every charge keeps its place within it, so the rms size along an
axis is R/sqrt(5), the energy of a charge at the edge E_m = (q Q/(4 pi eps0)) (1/R0 - 1/R), the
mean 3/5 E_m and the spread sqrt(12/175) E_m.
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.centre_and_size import RmsSize
from driftwell.answers.kinds.kinetic_energy import KineticEnergy, KineticEnergySpread
from driftwell.constants import BOLTZMANN, COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.forms import spelled
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.scene import Scene
from driftwell.particles.shapes.ball import Ball

FORMULA = Formula(
    "Coulomb explosion of a uniform ball",
    "t = (R0^3/(2 A))^(1/2) [(chi (chi - 1))^(1/2) + ln(chi^(1/2) + (chi - 1)^(1/2))], "
    "A = q Q/(4 pi eps0 m), chi = R/R0",
    "A. E. Kaplan, B. Y. Dubetsky and P. L. Shkolnikov, Phys. Rev. Lett. 91 (2003) 143401; Gauss's "
    "law. From memory.",
    "a ball filled evenly with many charges of one kind, at rest, in free space, slow",
)
MANY = 100
COLD = 0.02
"""Part of the energy at the edge that heat may be."""
_BISECTIONS = 200


def strength(group: Group) -> float:
    """A of equation (2), m^3/s^2."""
    return COULOMB_CONSTANT * abs(group.body.charge * group.charge) / group.body.mass


def time_to(ratio: float, radius: float, force: float) -> float:
    """Equation (2), s; ratio : chi; radius : R0, m; force : A."""
    root = math.sqrt(ratio * (ratio - 1.0)) + math.log(math.sqrt(ratio) + math.sqrt(ratio - 1.0))
    return math.sqrt(radius**3 / (2.0 * force)) * root


def ratio_at(time: float, radius: float, force: float) -> float:
    """chi of equation (2) at a time, s."""
    low, high = 1.0, 2.0 + time * math.sqrt(2.0 * force / radius**3)
    for _ in range(_BISECTIONS):
        middle = 0.5 * (low + high)
        if time_to(middle, radius, force) < time:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)


def values(scene: Scene) -> Values:
    """The time to twice its radius, of every cloud that fills a volume."""
    for group in scene.groups:
        if not group.solid or scene.scenario.coulomb.method == "off":
            continue
        radius = math.sqrt(5.0) * math.prod(group.size) ** (1.0 / 3.0)
        reasons = _against(scene, group, radius)
        moving = group.lorentz * group.lorentz  # clocks of a flying cloud go slower
        time = time_to(2.0, radius * moving ** (1.0 / 6.0), strength(group)) * group.lorentz
        yield HandValue(
            FORMULA,
            f"time {group.named} to twice its radius, let go",
            time,
            "s",
            not reasons,
            "; ".join(reasons) or f"a ball of {spelled(radius, 'm', 4)} by itself",
        )


def _against(scene: Scene, group: Group, radius: float) -> list[str]:
    """Why the cloud is not the ball of the formula."""
    reasons = []
    if not isinstance(group.form.shape, Ball):
        reasons.append("it is no evenly filled ball: taken as one of the same volume")
    if not scene.fieldless:
        reasons.append("fields, or a gas, act on it")
    if not scene.alone(group) or scene.scenario.images is not None:
        reasons.append("others push it")
    if group.count < MANY:
        reasons.append(f"{group.count} charges are few")
    edge = COULOMB_CONSTANT * abs(group.charge * group.body.charge) / radius
    if 1.5 * BOLTZMANN * group.temperature > COLD * edge:
        reasons.append("its heat counts beside its charge")
    if group.lorentz > 1.0 + 1e-3:
        reasons.append("it flies fast: its length counts in its own frame")
    return reasons


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """Rms size, mean energy and its spread at one time, of a ball that the formula is about."""
    if not isinstance(question, RmsSize | KineticEnergy | KineticEnergySpread):
        return None
    group = scene.group(question.of)
    if group is None or question.over is not None or question.at == "start":
        return None
    shape = group.form.shape
    if not isinstance(shape, Ball) or scene.scenario.wall or group.speed > 0.0:
        return None
    if _against(scene, group, shape.radius) or getattr(question, "statistic", "rms") != "rms":
        return None
    time = scene.scenario.duration if question.at == "end" else float(question.at)
    force = strength(group)
    ratio = ratio_at(time, shape.radius, force)
    edge = group.body.mass * force / shape.radius * (1.0 - 1.0 / ratio) / ELEMENTARY_CHARGE
    match question:
        case RmsSize():
            value, unit = shape.radius * ratio / math.sqrt(5.0), "m"
        case KineticEnergy():
            value, unit = 0.6 * edge, "eV"
        case _:
            value, unit = math.sqrt(12.0 / 175.0) * edge, "eV"
    why = f"{ratio:.4g} times its radius at {spelled(time, 's')}"
    return HandValue(FORMULA, question.words(), value, unit, True, why)


KIND = HandKind((FORMULA,), values, answer)
