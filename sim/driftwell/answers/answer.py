"""What a run says to its questions."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from driftwell.errors import DriftwellError

if TYPE_CHECKING:
    from driftwell.answers.evidence import Evidence
    from driftwell.answers.form import QuestionForm


@dataclass(frozen=True, slots=True)
class Answer:
    """A value with its unit and its sampling error.

    name, ask : of the question, as in the scenario
    value, error : in `unit`; error is None where none is known
    note : what else to know, empty where nothing
    """

    name: str
    ask: str
    value: float
    unit: str
    error: float | None
    note: str


def answer_all(questions: Sequence[QuestionForm], evidence: Evidence) -> list[Answer]:
    """The answers to all questions, in their order.

    A question that cannot be answered becomes an answer that is not a number, with the reason in
    its note; it never takes the other answers with it.
    """
    return [_answer(question, evidence) for question in questions]


def _answer(question: QuestionForm, evidence: Evidence) -> Answer:
    try:
        return question.answer(evidence)
    except DriftwellError as reason:
        note = str(reason)
    except Exception as defect:  # a defect in one estimator must not cost the run its answers
        note = f"a defect of driftwell, please report it: {type(defect).__name__}: {defect}"
    return Answer(question.name, question.ask, math.nan, question.unit, None, note)
