"""The three frequencies of one charge in a Penning trap.

    omega_c = |q| B / m,   omega_z^2 = k_z                                                   (1)
    omega_+- = (omega_c +- sqrt(omega_c^2 - 2 omega_z^2)) / 2                                (2)

Held where omega_c^2 > 2 omega_z^2. A tilt of the magnet and an elliptic field shift all three, and
leave omega_c^2 = omega_+^2 + omega_-^2 + omega_z^2 (the invariance theorem).
"""

from __future__ import annotations

import math

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.frequency import Frequency
from driftwell.fields.uniform_magnetic import UniformMagnetic
from driftwell.hand.among_others import shifted_by_others
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.rf_trap import body_of
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

TURNS = Formula(
    "modified cyclotron and magnetron frequency",
    "omega_+- = (omega_c +- (omega_c^2 - 2 omega_z^2)^(1/2))/2, omega_c = |q| B/m",
    "L. S. Brown and G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233, sec. 2. From memory.",
    "one slow charge in an ideal round trap along the magnet, omega_c^2 > 2 omega_z^2",
)
AXIAL = Formula(
    "axial frequency",
    "f_z = (q V/(m d^2))^(1/2)/(2 pi)",
    "L. S. Brown and G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233, eq. 2.6. From memory.",
    "one charge near the centre of an ideal quadrupole, or the centre of a cloud of one kind in it",
)
_UNEVEN = 1e-6


def radial_frequencies(cyclotron: float, axial: float) -> tuple[float, float] | None:
    """Equation (2): the fast and the slow, rad/s; None where the charge is not held."""
    root = cyclotron**2 - 2.0 * axial**2
    if root <= 0.0:
        return None
    fast = 0.5 * (cyclotron + math.sqrt(root))
    return fast, 0.5 * axial**2 / fast


def values(scene: Scene) -> Values:
    """Of every species in a static quadrupole along a magnet."""
    for body in scene.kinds:
        trap = _penning(scene, trap_of(scene, body))
        if trap is not None:
            yield from _all(scene, trap)


def _penning(scene: Scene, trap: Trap | None) -> Trap | None:
    if trap is None or trap.cyclotron == 0.0 or trap.drive != 0.0 or trap.static[2] <= 0.0:
        return None
    return trap


def _all(scene: Scene, trap: Trap) -> list[HandValue]:
    axial = math.sqrt(trap.static[2])
    cyclotron = abs(trap.cyclotron)
    reasons = [trap.doubt()] if trap.besides else []
    uneven = abs(trap.static[0] - trap.static[1]) / axial**2
    if uneven > _UNEVEN:
        reasons.append(f"the field is elliptic by {uneven:.2g}")
    if any(isinstance(f, UniformMagnetic) and any(f.along[:2]) for f in scene.scenario.field):
        reasons.append("the magnet is tilted")
    name = trap.body.name
    found = radial_frequencies(cyclotron, axial)
    turn = 2.0 * math.pi
    ratio = f"omega_z/omega_c = {axial / cyclotron:.3g}"
    why = "; ".join([*reasons, ratio])
    inside = not reasons
    made = [HandValue(AXIAL, f"axial frequency of {name}", axial / turn, "Hz", inside, why)]
    if found is None:
        return [replace_outside(made[0], f"{ratio}: nothing is held across")]
    pairs = (
        (f"modified cyclotron frequency of {name}", found[0]),
        (f"magnetron frequency of {name}", found[1]),
    )
    return made + [HandValue(TURNS, what, rate / turn, "Hz", inside, why) for what, rate in pairs]


def replace_outside(value: HandValue, why: str) -> HandValue:
    """The same value, outside its range."""
    return HandValue(value.formula, value.what, value.value, value.unit, False, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The frequency along z; across, that of the two which lies `near`."""
    if not isinstance(question, Frequency):
        return None
    body = body_of(scene, question.of)
    trap = _penning(scene, None if body is None else trap_of(scene, body))
    if trap is None:
        return None
    every = _all(scene, trap)
    chosen = every[:1] if question.axis == "z" else every[1:]
    if question.near is not None:
        chosen = [each for each in chosen if abs(each.value / question.near - 1.0) < 0.1]
    return shifted_by_others(question, scene, chosen[0]) if len(chosen) == 1 else None


KIND = HandKind((TURNS, AXIAL), values, answer)
