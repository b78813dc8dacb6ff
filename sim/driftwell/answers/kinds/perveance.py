"""Perveance of the beam through a detector: how strongly its own charge acts on it.

    perveance               P = |I| / V^(3/2),  V = T / |q|                                   (1)
    generalised perveance   K = (2 |I| / I_0) / (beta gamma)^3,  I_0 = 4 pi eps0 m c^3 / |q|  (2)

I is the net current over the window, T the mean kinetic energy of the charges that passed in it,
beta and gamma those of T. P is what a gun gives whatever its voltage, K what stands in the
envelope equation R'' = K/R + ... of a round uniform beam. Eq. 2 is that of a beam without
neutralisation. The error joins that of the current and of the mean energy.

Both are of what passes a plane, not of a cloud at one time: a beam is a current.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.2 (eq. 2) and 1.3 (eq. 1);
C. D. Child, Phys. Rev. 32 (1911) 492 (V^(3/2)). From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.kinds.passage_question import CurrentQuestion, window_in_words
from driftwell.answers.passages import (
    Passages,
    alike,
    current_of,
    first_of_each,
    one_species,
    passages_in_words,
)
from driftwell.answers.sampling import mean_error
from driftwell.constants import ELECTRIC_CONSTANT, ELEMENTARY_CHARGE, SPEED_OF_LIGHT
from driftwell.errors import AnswerError
from driftwell.forms import key
from driftwell.forms.spelling import spelled

_LEAST = 2


class _BeamPerveance(CurrentQuestion):
    """What both perveances share: current, mean kinetic energy and their errors."""

    def of_beam(self, current: float, energy: float, charge: float, mass: float) -> float:
        """The value from |I|, A, and T, J, of particles with |q|, C, and m, kg."""
        raise TypeError(f"{type(self).__name__} must say how it is worked out")

    def answer(self, evidence: Evidence) -> Answer:
        clouds = self.clouds(evidence)
        passed = self.all_passages(evidence)
        each = alike(first_of_each(passed), _LEAST, self.of)
        charge, mass = one_species(each)
        if charge == 0.0:
            raise AnswerError("particles without charge make no current")
        current = current_of(passed, self.over, clouds, evidence)
        energy, energy_error = mean_energy(each)

        def value(joules: float) -> float:
            return self.of_beam(abs(current.value), joules, abs(charge), mass)

        found = value(energy)
        by_energy = 0.5 * abs(value(energy + energy_error) - value(energy - energy_error))
        note = (
            f"{spelled(current.value, 'A', 4)} at "
            f"{spelled(energy / ELEMENTARY_CHARGE, 'eV', 5)}; "
            f"{passages_in_words(passed, clouds, self.over)}"
        )
        return self.answered(found, math.hypot(found * current.relative_error, by_energy), note)


class Perveance(_BeamPerveance):
    """Current over voltage to the power 3/2."""

    unit: ClassVar[str] = "A/V^1.5"
    ask: Literal["perveance"] = key("current over voltage to the power 3/2, at a detector")

    def of_beam(self, current: float, energy: float, charge: float, mass: float) -> float:
        return current / math.pow(energy / charge, 1.5)

    def words(self) -> str:
        return (
            f'perveance of {self.whose()} at detector "{self.of}", current over voltage to the '
            f"power 3/2, {window_in_words(self.over)}"
        )


class GeneralisedPerveance(_BeamPerveance):
    """The dimensionless strength of a beam's own charge."""

    unit: ClassVar[str] = "1"
    ask: Literal["generalised-perveance"] = key(
        "dimensionless strength of a beam's own charge, at a detector"
    )

    def of_beam(self, current: float, energy: float, charge: float, mass: float) -> float:
        unit = 4.0 * math.pi * ELECTRIC_CONSTANT * mass * SPEED_OF_LIGHT**3 / charge
        excess = energy / (mass * SPEED_OF_LIGHT**2)
        return 2.0 * current / unit / math.pow(excess * (2.0 + excess), 1.5)

    def words(self) -> str:
        return (
            f'generalised perveance of {self.whose()} at detector "{self.of}" '
            f"{window_in_words(self.over)}"
        )


def mean_energy(passed: Passages) -> tuple[float, float]:
    """Mean kinetic energy of one real particle and its error, J.

    Raises AnswerError where nothing moves.
    """
    energy = passed.energy
    mean = float(np.mean(energy))
    if mean == 0.0:
        raise AnswerError("what passed has no kinetic energy")
    return mean, min(mean_error(energy) or 0.0, 0.5 * mean)
