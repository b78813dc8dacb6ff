"""Kinetic energy with which charges pass a detector: mean, rms spread or full width at half
maximum, of one real particle, in eV. A charge counts once, with its first passage.
"""

from __future__ import annotations

from typing import ClassVar, Literal

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.kinds.arrival_time import LEAST, STATISTICS, Statistic, statistic_of
from driftwell.answers.kinds.passage_question import PassageQuestion
from driftwell.answers.passages import passages_in_words
from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.forms import key


class ArrivalEnergy(PassageQuestion):
    """Mean or spread of the kinetic energies with which charges pass a detector."""

    unit: ClassVar[str] = "eV"
    ask: Literal["arrival-energy"] = key("kinetic energy with which charges pass a detector")
    statistic: Statistic = key(
        "mean; rms: standard deviation; fwhm: full width at half maximum", default="mean"
    )

    def answer(self, evidence: Evidence) -> Answer:
        passed = self.first_passages(evidence, LEAST[self.statistic])
        value, error = statistic_of(self.statistic, passed.energy / ELEMENTARY_CHARGE)
        note = passages_in_words(passed, self.clouds(evidence), self.over)
        if error is None:
            note += "; too few different energies to tell an error from"
        return self.answered(value, error, note)

    def words(self) -> str:
        return (
            f"{STATISTICS[self.statistic]} of the kinetic energies of {self.whose()} at detector "
            f'"{self.of}"{self.when()}'
        )
