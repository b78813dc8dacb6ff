"""Answers of a run beside what can be said by hand to the same questions."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import reading
from driftwell.answers.form import TIME_TOLERANCE
from driftwell.errors import DriftwellError
from driftwell.forms.paragraph import paragraph
from driftwell.hand.formula import HandValue
from driftwell.hand.hand_lines import number
from driftwell.hand.scene import scene_of_run
from driftwell.hand.table import hand_answer

if TYPE_CHECKING:
    from driftwell.record.reader import Run

AGREE = 2.0
"""Error bars within which a run and a formula agree."""
CLOSE = 0.01
"""Part within which they are close, whatever the error bar says."""


@dataclass(frozen=True, slots=True)
class Comparison:
    """One answer, and what a formula says to its question."""

    answer: Answer
    by_hand: HandValue

    @property
    def apart(self) -> float:
        """By which part of the hand value the run is larger, -2.1 by 5 % than -2; NaN of 0."""
        hand = self.by_hand.value
        return (self.answer.value - hand) / hand if hand else math.nan

    @property
    def bars(self) -> float | None:
        """By how many of its own error bars; None where the answer has none."""
        error = self.answer.error
        if error is None or not math.isfinite(error) or error <= 0.0:
            return None
        return abs(self.answer.value - self.by_hand.value) / error


def comparisons(run: Run) -> list[Comparison]:
    """All answers that a formula is about, in the order of the questions.

    None of a run that did not reach its end: what it says of the end is of another time.
    """
    if not run.answers or run.end_time < run.header.duration * (1.0 - TIME_TOLERANCE):
        return []
    try:
        scene = scene_of_run(run)
    except DriftwellError:  # the first snapshot or the scenario cannot be read any more
        return []
    if scene is None:
        return []
    known = {answer.name: answer for answer in run.answers}
    found = []
    for question in scene.scenario.question:
        answer = known.get(question.name)
        if answer is None or not math.isfinite(answer.value):
            continue
        by_hand = hand_answer(question, scene)
        if by_hand is not None and by_hand.unit == answer.unit:
            found.append(Comparison(answer, by_hand))
    return found


def comparison_lines(found: Sequence[Comparison], width: int, sign: str = "±") -> list[str]:
    """The comparisons in words; nothing where there are none."""
    if not found:
        return []
    lines = ["By hand, and by the run:"]
    for each in found:
        lines += paragraph(_sentence(each, sign), width, "  ", "      ")
    return lines


def _sentence(each: Comparison, sign: str) -> str:
    answer, hand = each.answer, each.by_hand
    shown = reading(answer)
    error = f" {sign} {shown.error}" if shown.error else ""
    unit = f" {shown.unit}" if shown.unit else ""
    return (
        f"{answer.name}: by hand {number(hand.value, hand.unit)} ({hand.formula.name}); the run "
        f"{shown.value}{error}{unit}: {difference(each)}"
    )


def difference(each: Comparison) -> str:
    """How far they are apart, and what that means."""
    hand, bars = each.by_hand, each.bars
    size = abs(each.apart)
    way = "more" if each.apart > 0.0 else "less"
    if math.isnan(size):
        text = "by hand it is zero"
    else:
        text = "the same to all digits shown" if size < 5e-7 else f"{100.0 * size:.2g} % {way}"
    if bars is not None and size >= 5e-7:
        text += f", {bars:.2g} of its error bars"
    if not hand.inside:
        return f"{text}. Outside the formula's range: {hand.why}"
    if (bars is not None and bars <= AGREE) or size < CLOSE:
        return f"{text}. They agree; the formula is within its range: {hand.why}"
    return (
        f"{text}. The formula is within its range ({hand.why}), so look at the step, at the number "
        "of charges, and at what the formula leaves out"
    )
