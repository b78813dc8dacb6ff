"""Mean distance from the charges of a cloud to their nearest neighbours.

A neighbour is any other charge there is, of this cloud or another. The error treats the distances
as known and jackknifes over the charges they belong to; taking the charges themselves out, as for
other values, would not do, since what is nearest jumps. Neighbours of each other share one
distance: below about 50 charges the error is too small, by up to 1.4 at 10.
"""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.charges import charges_at, number_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import InstantQuestion, instant_in_words
from driftwell.answers.sampling import jackknife_error
from driftwell.errors import AnswerError
from driftwell.forms import key


class NearestNeighbour(InstantQuestion):
    """Mean distance to the nearest other charge."""

    unit: ClassVar[str] = "m"
    ask: Literal["nearest-neighbour"] = key("mean distance to the nearest other charge")

    def answer(self, evidence: Evidence) -> Answer:
        from scipy.spatial import cKDTree

        time = self.time_in(evidence)
        charges = charges_at(evidence, self.of, time)
        everyone = evidence.snapshot(time).position
        if len(everyone) < 2:
            raise AnswerError("there is no other charge")
        distance = np.asarray(cKDTree(everyone).query(charges.position.T, k=[2])[0])[:, 0]
        error = jackknife_error(lambda keep: float(distance[keep].mean()), len(charges))
        note = number_in_words(len(charges), charges.cloud)
        if error is None:
            note += "; too few charges to tell an error from"
        return self.answered(float(distance.mean()), error, note)

    def words(self) -> str:
        return f'nearest-neighbour distance in cloud "{self.of}" {instant_in_words(self.at)}'
