"""Whether what is averaged over a window still changed in it.

The question is asked of the first and of the second half of its window. Their difference, over the
root of the sum of their squared errors, is a Gaussian deviate where the value holds still: beyond 4
once in 16 000 windows. A change below a twentieth of the value is let pass: it is known, and small.
"""

from __future__ import annotations

import math
from collections.abc import Iterator

from driftwell.answers.form import QuestionForm
from driftwell.errors import DriftwellError
from driftwell.forms import spelled
from driftwell.judgement.finding import Finding
from driftwell.judgement.subject import Subject

LIMIT = 4.0
SMALL = 0.05
_CHANGES = ("heating-rate", "lifetime", "mobility")
"""Questions of what changes, or that count over their window."""


def unsettled(subject: Subject) -> Iterator[Finding]:
    """Each question with a window whose halves differ."""
    if not subject.ended or subject.scenario is None:
        return
    for question in subject.scenario.question:
        window = getattr(question, "over", None)
        if window is None or question.ask in _CHANGES:
            continue
        first, last = window
        middle = 0.5 * (first + last)
        before = _answered(subject, question, (first, middle))
        after = _answered(subject, question, (middle, last))
        if before is None or after is None:
            continue
        error = math.hypot(before[1], after[1])
        change = abs(after[0] - before[0])
        size = 0.5 * (abs(before[0]) + abs(after[0]))
        if error <= 0.0 or change <= LIMIT * error or change <= SMALL * size:
            continue
        later = spelled(last + (last - first), "s", 3)
        yield Finding(
            "window not settled",
            f'"{question.name}" goes from {spelled(before[0], question.unit, 3)} in the first half '
            f"of its window to {spelled(after[0], question.unit, 3)} in the second, by "
            f"{change / error:.2g} error bars, where {LIMIT:g} may be: its error does not hold "
            "that change",
            change / error,
            LIMIT,
            f'Move `over` of that question later, for example from "{spelled(last, "s", 3)}" to '
            f'"{later}", with a duration as long.',
        )


def _answered(
    subject: Subject, question: QuestionForm, window: tuple[float, float]
) -> tuple[float, float] | None:
    """Value and error in another window; None where there is none."""
    try:
        found = question.model_copy(update={"over": window}).answer(subject.run)
    except DriftwellError:
        return None
    if found.error is None or not math.isfinite(found.value):
        return None
    return found.value, found.error
