"""Highest density of a cloud, in real particles per volume (:mod:`driftwell.answers.density`)."""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.charges import charges_at, number_in_words
from driftwell.answers.density import LEAST_FOR_PEAK, peak_density
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import InstantQuestion, instant_in_words
from driftwell.answers.sampling import jackknife_error
from driftwell.forms import key


class PeakDensity(InstantQuestion):
    """Density at the densest place of a cloud."""

    unit: ClassVar[str] = "1/m^3"
    ask: Literal["peak-density"] = key("highest density, real particles per volume")

    def answer(self, evidence: Evidence) -> Answer:
        charges = charges_at(evidence, self.of, self.time_in(evidence), LEAST_FOR_PEAK)
        density = peak_density(charges)
        value = density.of(np.ones(len(charges), dtype=np.bool_))
        error = jackknife_error(density.of, len(charges))
        return self.answered(
            value, error, f"{number_in_words(len(charges), charges.cloud)}; {density.note}"
        )

    def words(self) -> str:
        return f'peak density of cloud "{self.of}" {instant_in_words(self.at)}'
