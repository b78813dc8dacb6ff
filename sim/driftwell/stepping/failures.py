"""Why the motion cannot be continued: a failing status in words, with whom, when, what to do."""

from __future__ import annotations

from driftwell.errors import StepError
from driftwell.forms import spelled
from driftwell.kernels.status import (
    COLLAPSE,
    CROWDED_STEP,
    NOT_FINITE,
    OVERFLOW,
    RUNAWAY,
)
from driftwell.particles.state import Particles

_OF_A_CHARGE = {NOT_FINITE, RUNAWAY, COLLAPSE, CROWDED_STEP}


def failure(
    status: int, at_fault: int, particles: Particles, time: float, steps: int, repeats: bool
) -> StepError:
    """The error that a failing status is.

    at_fault : index of the charge it speaks of, where it speaks of one
    time : s; steps : since the run began; repeats : whether everything does, along an axis
    """
    when = f"after {steps} step{'s' * (steps != 1)}, at t = {spelled(time, 's')}"
    if status not in _OF_A_CHARGE:
        text = f"the step ended with the unknown status {status}."
        if status == OVERFLOW:
            text = "a single step met too many surfaces; take a shorter step."
        return StepError(f"{when}: {text}", None)
    number = int(particles.id[at_fault])
    where = ", ".join(spelled(float(each), "m", 4) for each in particles.position[:, at_fault])
    return StepError(f"{when}: {_of_a_charge(status, number, where, repeats)}", number)


def _of_a_charge(status: int, number: int, where: str, repeats: bool) -> str:
    who = f"charge {number}"
    if status == NOT_FINITE:
        text = (
            f"the position or velocity of {who} is no longer a number. It met a point where a "
            "field has no value, or the step is far too long; take a shorter step, or put a wall "
            "before that point."
        )
        if repeats:
            text += " Or the beam is more than four times as wide as [cell] is long."
        return text
    if status == RUNAWAY:
        return (
            f"{who} has run away, at ({where}), beyond stepping.extent. The motion is unstable or "
            "nothing stops it: put a wall, or set a larger extent."
        )
    if status == CROWDED_STEP:
        return (
            f"{who} would be met by a process more than 100000 times in one step. Take a shorter "
            "step, or a thinner gas, or describe the gas by its drag."
        )
    return (
        f"{who} falls towards an opposite charge faster than the step can follow, at ({where}). "
        "Take a shorter step, or give coulomb.softening a length."
    )
