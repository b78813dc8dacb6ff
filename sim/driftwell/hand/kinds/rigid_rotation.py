"""Rotation of a cold cloud in a Penning trap, from its density.

    omega (omega_c - omega) = omega_p^2 / 2,
    omega = omega_c / 2 (1 - sqrt(1 - 2 omega_p^2 / omega_c^2))                              (1)

the slow root; omega_p that of the density. The cloud of (1) is a uniform spheroid; its density
and the trap's axial frequency say how flat it is, by L_z = omega_z^2 / omega_p^2
(:mod:`driftwell.hand.ellipsoid`).
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.rotation_frequency import RotationFrequency
from driftwell.hand.ellipsoid import aspect_of
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.group import Group
from driftwell.hand.kinds.plasma_frequency import plasma_frequency
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

FORMULA = Formula(
    "rigid rotation in balance",
    "omega = omega_c/2 (1 - (1 - 2 omega_p^2/omega_c^2)^(1/2))",
    "R. C. Davidson, Physics of Nonneutral Plasmas (1990), ch. 3; D. H. E. Dubin and T. M. O'Neil, "
    "Rev. Mod. Phys. 71 (1999) 87. From memory.",
    "a cold cloud of many charges of one kind, spheroid of the shape that the trap gives it",
)
SHAPE_WITHIN = 0.2
"""Part by which the cloud's aspect may differ from that in balance."""
_LEAST = 100


def slow_rotation(cyclotron: float, plasma: float) -> float | None:
    """Equation (1), rad/s; None above the Brillouin density."""
    square = 2.0 * plasma**2 / cyclotron**2
    if square > 1.0:
        return None
    return 0.5 * cyclotron * square / (1.0 + math.sqrt(1.0 - square))


def values(scene: Scene) -> Values:
    """Of every cloud that fills a volume in a static quadrupole along a magnet."""
    for group in scene.groups:
        found = _value(scene, group)
        if found is not None:
            yield found


def _value(scene: Scene, group: Group) -> HandValue | None:
    trap = trap_of(scene, group.body)
    if trap is None or trap.cyclotron == 0.0 or trap.drive or trap.static[2] <= 0.0:
        return None
    if not group.solid:
        return None
    plasma = 2.0 * math.pi * plasma_frequency(group.uniform_density, group.body)
    rate = slow_rotation(abs(trap.cyclotron), plasma)
    if rate is None:
        return None
    reasons = _against(scene, group, trap, plasma)
    why = "; ".join(reasons) or "density, shape and trap are in balance"
    turned = math.copysign(rate, trap.cyclotron) / (2.0 * math.pi)
    what = f"rotation {group.named} about z"
    return HandValue(FORMULA, what, turned, "Hz", not reasons, why)


def _against(scene: Scene, group: Group, trap: Trap, plasma: float) -> list[str]:
    """Why the cloud at the start is not that of the formula."""
    reasons = [trap.doubt()] if trap.besides else []
    if len(scene.kinds) > 1 or len(scene.groups) > 1:
        reasons.append("other clouds are there")
    if group.number < _LEAST:
        reasons.append(f"{group.number:.6g} particles are few")
    aspect = aspect_of(min(trap.static[2] / plasma**2, 1.0))
    x, y, z = group.size
    own = 2.0 * z / (x + y)
    if aspect is None or abs(own / aspect - 1.0) > SHAPE_WITHIN:
        flat = "none" if aspect is None else f"{aspect:.3g}"
        reasons.append(f"it is {own:.3g} times as long as wide, in balance at its density {flat}")
    return reasons


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """Of the rotation about z, of a cloud that begins in balance and keeps the angular momentum."""
    if not isinstance(question, RotationFrequency) or question.axis != "z":
        return None
    group = scene.group(question.of)
    if group is None or scene.scenario.process:
        return None
    found = _value(scene, group)
    return found if found is not None and found.inside else None


KIND = HandKind((FORMULA,), values, answer)
