"""Mathieu's a and q of an RF trap, and its secular frequencies.

    x'' + (a - 2 q cos(2 tau)) x = 0,   tau = Omega t / 2                                    (1)
    f = beta Omega / (4 pi),   cos(pi beta) = (x1(pi) + x2'(pi)) / 2                         (2)

x1 and x2 are the solutions of (1) that begin with (1, 0) and (0, 1); they are followed over one
period by the classical Runge-Kutta rule. Where the right side of (2) is beyond 1 the motion grows.
"""

from __future__ import annotations

import math

from driftwell.answers.form import AXES, QuestionForm
from driftwell.answers.kinds.frequency import Frequency
from driftwell.forms.body import Body
from driftwell.hand.among_others import shifted_by_others
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

PARAMETER = Formula(
    "Mathieu's stability parameter",
    "q = 2 |k1|/Omega^2, a = 4 k0/Omega^2 for x'' = -(k0 + k1 cos(Omega t)) x",
    "W. Paul, Rev. Mod. Phys. 62 (1990) 531, eqs. 1-6; E. Mathieu (1868). From memory.",
    "one charge near the centre of quadrupole fields; it is held where all axes are stable, "
    "for a = 0 below q = 0.908",
)
SECULAR = Formula(
    "secular frequency",
    "f = beta(a, q) Omega/(4 pi), cos(pi beta) from the solutions over one period",
    "N. W. McLachlan, Theory and Application of Mathieu Functions (1947), ch. 4; DLMF ch. 28. "
    "From memory.",
    "one charge near the centre of quadrupole fields, or the centre of a cloud of one kind in them",
)
_STEPS = 400


def characteristic_exponent(a: float, q: float) -> float | None:
    """Beta of equation (2), from 0 to 1; None where the motion grows."""
    h = math.pi / _STEPS
    trace = 0.0
    for x0, y0, of_x in ((1.0, 0.0, True), (0.0, 1.0, False)):
        x, y = x0, y0
        for k in range(_STEPS):
            k1, k2, k4 = (
                -(a - 2.0 * q * math.cos(2.0 * (k + part) * h)) for part in (0.0, 0.5, 1.0)
            )
            ax, ay = y, k1 * x
            bx, by = y + 0.5 * h * ay, k2 * (x + 0.5 * h * ax)
            cx, cy = y + 0.5 * h * by, k2 * (x + 0.5 * h * bx)
            dx, dy = y + h * cy, k4 * (x + h * cx)
            x += h / 6.0 * (ax + 2.0 * bx + 2.0 * cx + dx)
            y += h / 6.0 * (ay + 2.0 * by + 2.0 * cy + dy)
        trace += x if of_x else y
    half = 0.5 * trace
    return None if abs(half) >= 1.0 else math.acos(half) / math.pi


def values(scene: Scene) -> Values:
    """a, q and the secular frequencies of every species in an RF trap."""
    for body in scene.kinds:
        trap = trap_of(scene, body)
        if trap is None or trap.drive == 0.0 or trap.cyclotron != 0.0:
            continue
        for axis, (a, q) in zip(AXES, trap.parameters, strict=True):
            if q > 0.0:
                yield _parameter(trap, axis, a, q)
        for axis in AXES:
            found = secular(trap, axis)
            if found is not None:
                yield found


def _parameter(trap: Trap, axis: str, a: float, q: float) -> HandValue:
    stable = characteristic_exponent(a, q) is not None
    why = f"a = {a:.4g}; {'stable' if stable else 'the motion grows: nothing is held'} along {axis}"
    doubt = trap.doubt()
    what = f"Mathieu's q of {trap.body.name} along {axis}"
    return HandValue(
        PARAMETER, what, q, "1", stable and not doubt, "; ".join([why, doubt or ""]).rstrip("; ")
    )


def secular(trap: Trap, axis: str) -> HandValue | None:
    """The frequency along an axis; None where the motion there is not held."""
    a, q = trap.parameters[AXES.index(axis)]
    beta = characteristic_exponent(a, q)
    if beta is None:
        return None
    doubt = trap.doubt()
    why = doubt or f"a = {a:.4g}, q = {q:.4g}"
    what = f"secular frequency of {trap.body.name} along {axis}"
    value = beta * trap.drive / (4.0 * math.pi)
    return HandValue(SECULAR, what, value, "Hz", not doubt, why)


def answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """The frequency of a cloud's centre, or of one of its charges, along an axis."""
    if not isinstance(question, Frequency):
        return None
    body = body_of(scene, question.of)
    trap = None if body is None else trap_of(scene, body)
    if trap is None or trap.drive == 0.0 or trap.cyclotron != 0.0:
        return None
    found = secular(trap, question.axis)
    if found is None or (
        question.near is not None and abs(question.near / found.value - 1.0) > 0.1
    ):
        return None
    return shifted_by_others(question, scene, found)


def body_of(scene: Scene, cloud: str) -> Body | None:
    """The species of a cloud or source."""
    for each in scene.moving:
        if each.name == cloud:
            return scene.bodies[each.species]
    return None


KIND = HandKind((PARAMETER, SECULAR), values, answer)
