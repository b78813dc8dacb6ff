"""All questions of a scenario answered from what its run recorded."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import QuestionForm
from driftwell.errors import DriftwellError


def answer_all(questions: Sequence[QuestionForm], evidence: Evidence) -> list[Answer]:
    """The answers to all questions, in their order.

    A question that cannot be answered becomes an answer that is not a number, with the reason in
    its note; it never takes the other answers with it. Each carries the error of the forces that
    moved the charges until then.
    """
    return [
        with_force_errors(_answer(question, evidence), question, evidence) for question in questions
    ]


def _answer(question: QuestionForm, evidence: Evidence) -> Answer:
    try:
        return question.answer(evidence)
    except DriftwellError as reason:
        note = str(reason)
    except Exception as defect:  # a defect in one estimator must not cost the run its answers
        note = f"a defect of driftwell, please report it: {type(defect).__name__}: {defect}"
    return Answer(question.name, question.ask, math.nan, question.unit, None, note)


def with_force_errors(answer: Answer, question: QuestionForm, evidence: Evidence) -> Answer:
    """The answer with the error of the forces that moved the charges until then."""
    until = question.moved_until(evidence.end_time)
    if until <= 0.0:
        return answer
    return replace(
        answer, coulomb_error=evidence.coulomb_error(until), field_error=evidence.field_error
    )
