"""Electric current through a detector, averaged over a stretch of time (eqs. 1 and 2 of
:mod:`driftwell.answers.passages`).

Along the detector's normal it counts positive for positive charges: electrons that fly along the
normal make a negative current. What passes back and forth cancels.
"""

from __future__ import annotations

from typing import ClassVar, Literal

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.kinds.passage_question import CurrentQuestion, window_in_words
from driftwell.answers.passages import current_of, passages_in_words
from driftwell.forms import key


class Current(CurrentQuestion):
    """Mean electric current through a detector, along its normal."""

    unit: ClassVar[str] = "A"
    ask: Literal["current"] = key("mean electric current through a detector, along its normal")

    def answer(self, evidence: Evidence) -> Answer:
        clouds = self.clouds(evidence)
        passed = self.all_passages(evidence)
        found = current_of(passed, self.over, clouds, evidence)
        against = int((passed.direction < 0.0).sum())
        note = passages_in_words(passed, clouds, self.over)
        if against:
            note += f"; {against} of {len(passed)} passages against the normal"
        return self.answered(found.value, found.error, note)

    def words(self) -> str:
        return (
            f'mean current of {self.whose()} through detector "{self.of}" '
            f"{window_in_words(self.over)}"
        )
