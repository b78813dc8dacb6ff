"""Coulomb force on one charge by all the others.

    F_i = k q_i sum over j of w_j q_j (x_i - x_j) / (|x_i - x_j|^2 + e^2)^(3/2)               (1)

on one real particle; w_j is how many real particles charge j stands for and e the softening length
of the run. The sum is worked out anew from the recorded places, so it says what the charges would
exert even where the run leaves them out (`method = "off"`).

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), eq. 1.2 (from memory); k from the electric
constant of CODATA 2022.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence, Snapshot
from driftwell.answers.form import (
    AXES,
    InstantQuestion,
    References,
    cloud_named,
    instant_in_words,
)
from driftwell.constants import COULOMB_CONSTANT
from driftwell.errors import AnswerError
from driftwell.forms import Count, NonNegative, key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


class Force(InstantQuestion):
    """Coulomb force on one charge of a cloud, a component or its magnitude."""

    unit: ClassVar[str] = "N"
    ask: Literal["force"] = key("Coulomb force of all other charges on one charge")
    charge: NonNegative[Count] = key("which charge of the cloud, counted from 0", example=0)
    axis: Literal["x", "y", "z", "magnitude"] = key("component, or magnitude", default="magnitude")

    def refers_to(self) -> References:
        return References(clouds=(self.of,), charges=((self.of, self.charge),))

    def answer(self, evidence: Evidence) -> Answer:
        time = self.time_in(evidence)
        number = charge_id(evidence, self.of, self.charge)
        snapshot = evidence.snapshot(time)
        place = np.flatnonzero(snapshot.id == number)
        if place.size == 0:
            raise AnswerError(
                f'charge {self.charge} of "{self.of}" is not left at {spelled(time, "s")}'
            )
        force = coulomb_force(snapshot, int(place[0]), evidence.softening)
        value = math.hypot(*force) if self.axis == "magnitude" else force[AXES.index(self.axis)]
        if not math.isfinite(value):
            raise AnswerError("another charge is at the same place, and nothing softens the force")
        others = len(snapshot.id) - 1
        note = f"by {others} other charge{'s' if others != 1 else ''}"
        if np.all(snapshot.weight == 1.0):
            return self.answered(value, 0.0, f"{note}, every one summed: no sampling error")
        note += ", on one real particle; no error: charges that stand for several make it grainy"
        return self.answered(value, None, note)

    def words(self) -> str:
        which = "magnitude" if self.axis == "magnitude" else f"{self.axis} component"
        return (
            f'Coulomb force on charge {self.charge} of cloud "{self.of}", {which}, '
            f"{instant_in_words(self.at)}"
        )


def charge_id(evidence: Evidence, cloud: str, charge: int) -> int:
    """The id of a cloud's charge, counted from 0. Raises AnswerError where it has too few."""
    facts = cloud_named(evidence, cloud)
    most = evidence.clouds[cloud].count  # of a source, with those it has not borne
    if charge >= most:
        raise AnswerError(
            f'"{cloud}" has {most} charges, counted from 0: there is no charge {charge}'
        )
    return facts.first_id + charge


def coulomb_force(snapshot: Snapshot, target: int, softening: float) -> Floats:
    """Force (3,), N, on one real particle of the charge in row `target`, eq. 1."""
    apart = snapshot.position[target] - np.delete(snapshot.position, target, axis=0)
    source = np.delete(snapshot.weight * snapshot.charge, target)
    square = np.sum(apart**2, axis=1) + softening**2
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        strength = source / (square * np.sqrt(square))
        total = np.sum(strength[:, None] * apart, axis=0)
    return np.asarray(COULOMB_CONSTANT * snapshot.charge[target] * total)
