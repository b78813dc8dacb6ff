"""Size of the spot that charges make on a detector (:mod:`driftwell.answers.extent`).

A charge counts once, with its first passage.
"""

from __future__ import annotations

from typing import ClassVar, Literal

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.extent import Measure, extent, extent_error, size_in_words
from driftwell.answers.form import AXES
from driftwell.answers.kinds.passage_question import PassageQuestion
from driftwell.answers.passages import passages_in_words
from driftwell.forms import key
from driftwell.forms.spelling import spelled

_LEAST = {"rms": 2, "edge": 10}


class SpotSize(PassageQuestion):
    """Size of the spot on a detector, about its own middle."""

    unit: ClassVar[str] = "m"
    ask: Literal["spot-size"] = key("size of the spot on a detector, about its own middle")
    axis: Literal["x", "y", "z", "radius"] = key(
        'along this axis, or "radius": distance from the middle', default="radius"
    )
    measure: Measure = key("rms; edge: the distance from the middle that holds 90 %", default="rms")

    def answer(self, evidence: Evidence) -> Answer:
        passed = self.first_passages(evidence, _LEAST[self.measure])
        axes = [0, 1, 2] if self.axis == "radius" else [AXES.index(self.axis)]
        places = passed.position[axes]
        middle = ", ".join(spelled(x, "m", 4) for x in passed.position.mean(axis=1))
        note = (
            f"{passages_in_words(passed, self.clouds(evidence), self.over)}; middle at ({middle})"
        )
        error = extent_error(places, self.measure)
        if error is None:
            note += "; too few charges to tell an error from"
        return self.answered(extent(places, self.measure), error, note)

    def words(self) -> str:
        return (
            f"{size_in_words(self.measure, self.axis)} of the spot of {self.whose()} on detector "
            f'"{self.of}"{self.when()}'
        )
