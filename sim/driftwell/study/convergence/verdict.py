"""All errors of one answer together, and what is to be said of it."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from driftwell.answers.answer import Answer
from driftwell.study.convergence.chance import OF_THE_WHOLE, Chance
from driftwell.study.convergence.differences import AxisError

NEGLIGIBLE = 1.0 / 3.0
"""An error below this part of the tolerance, or of all errors, needs no order."""
CONVERGED, NOT_ALL, NO_VALUE = "converged", "not answered in all runs", "no value"
NOT_ASYMPTOTIC = "not in the asymptotic range"
CHANCE = "chance"


@dataclass(frozen=True, slots=True)
class Convergence:
    """One answer with all its errors, in its unit.

    answer : of the judged run
    axes : errors by the names of the axes that matter
    by_chance : sampling and seeds weighed against each other
    random : whether chance has a part in it
    """

    answer: Answer
    axes: Mapping[str, AxisError]
    by_chance: Chance
    random: bool

    @property
    def combined(self) -> float:
        """The root of the sum of all squares; not a number where one of them is none."""
        return math.hypot(*self.parts().values())

    def parts(self) -> dict[str, float]:
        """What the combined error is made of: chance once, then every axis but the seeds."""
        chance = self.by_chance.error
        if math.isnan(chance) and not self.random:
            chance = 0.0
        axes = {name: each.error for name, each in self.axes.items() if name != "seeds"}
        return {CHANCE: chance, **axes}

    def allowed(self, tolerance: float) -> float:
        """The error that a relative tolerance leaves room for, in the unit of the answer."""
        if self.answer.ask in OF_THE_WHOLE:
            return tolerance
        return tolerance * abs(self.answer.value)

    def verdict(self, tolerance: float | None) -> str:
        """What is to be said of it; :data:`CONVERGED` alone says that the tolerance is kept."""
        if not math.isfinite(self.answer.value):
            return NO_VALUE
        if any(each.kind == "missing" for each in self.axes.values()):
            return NOT_ALL
        if not math.isfinite(self.combined):
            return "its error by chance is unknown"
        if tolerance is None:
            enough = NEGLIGIBLE * self.combined
        else:
            enough = NEGLIGIBLE * self.allowed(tolerance)
        wild = [
            name for name, each in self.axes.items() if not each.asymptotic and each.error > enough
        ]
        if wild:
            return f"{NOT_ASYMPTOTIC} of the {in_words(wild[0])}"
        if tolerance is not None and self.combined <= self.allowed(tolerance):
            return CONVERGED
        if self.combined == 0.0:
            return "exact"
        parts = self.parts()
        largest = max(parts, key=parts.__getitem__)
        if largest == CHANCE:
            return f"dominated by {CHANCE}"
        bound = self.axes[largest].kind == "bound"
        return f"dominated by the {in_words(largest)}" + bound * ", a bound that more seeds lower"


def in_words(axis: str) -> str:
    """The name of an axis as people say it."""
    return {"coulomb": "Coulomb sum", "field_map": "field map"}.get(axis, axis)
