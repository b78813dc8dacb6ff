"""What the scenario asked, what the run says, and what a formula says by hand."""

from __future__ import annotations

import math

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import common_lines
from driftwell.hand.comparison import Comparison, difference
from driftwell.hand.formula import Formula, HandValue
from driftwell.report.page.markup import NOTHING, Markup, joined, tag, together
from driftwell.report.page.numbers import amount, answered
from driftwell.report.page.section import Section, folded, paragraphs
from driftwell.report.page.table import Column, table
from driftwell.report.page.value_bar import value_bar
from driftwell.report.run_page.matter import Matter

_WIDTH = 10_000
"""Characters of a line: the page breaks them itself."""


def answers(matter: Matter) -> Section:
    """The answers, beside hand calculations where there are any."""
    found = matter.run.answers
    if not found:
        return Section("answers", "Answers", paragraphs(_none(matter)))
    by_hand = {id(each.answer): each for each in matter.comparisons}
    parts: list[Markup] = []
    if by_hand:
        rows = [_compared(answer, by_hand.get(id(answer))) for answer in found]
        columns = [
            Column("question"),
            Column("the run", number=True),
            Column("by hand", number=True),
            Column("run and hand"),
            Column("what that means"),
        ]
        caption = (
            "Answers of the run, ± their sampling error, beside what a formula says. In the small "
            "graphics the dot with its bar is the run, the upright line the hand calculation."
        )
    else:
        rows = [[answer.name, answered(answer), _note(answer)] for answer in found]
        columns = [Column("question"), Column("answer", number=True), Column("note")]
        caption = "Answers of the run, ± their sampling error."
    parts.append(table(caption, columns, rows))
    parts += [
        tag("p", f"{line[0].upper()}{line[1:]}.", class_="pale")
        for line in common_lines(found, _WIDTH)
    ]
    if not by_hand:
        parts.append(tag("p", _no_formula(matter), class_="pale"))
    parts.append(_formulas(matter))
    return Section("answers", "Answers", together(*parts))


def _none(matter: Matter) -> str:
    """Why there is no answer."""
    if matter.run.outcome.exit_code is None:
        return "The questions are answered once the run has ended."
    return "The scenario asks no questions: the run only recorded."


def _note(answer: Answer) -> str:
    unknown = answer.error is None or not math.isfinite(answer.error)
    parts = [answer.note] if answer.note else []
    if unknown and math.isfinite(answer.value) and not answer.note:
        parts.append("its sampling error is not known")
    return " ".join(parts)


def _compared(answer: Answer, found: Comparison | None) -> list[Markup | str]:
    """One row: answer, formula, graphic, words."""
    if found is None:
        return [answer.name, answered(answer), "", "", _note(answer)]
    hand = found.by_hand
    error = answer.error if answer.error is not None and math.isfinite(answer.error) else None
    shown_hand, shown_run = amount(hand.value, hand.unit), answered(answer)
    bar = value_bar(
        answer.value, error, hand.value, f"{answer.name}: run {shown_run}, by hand {shown_hand}"
    )
    words = [tag("p", f"{difference(found)}.")]
    if note := _note(answer):
        words.append(tag("p", note, class_="pale"))
    formula = tag("div", hand.formula.name, class_="pale")
    return [answer.name, shown_run, together(shown_hand, formula), bar, together(*words)]


def _no_formula(matter: Matter) -> str:
    run = matter.run
    if run.end_time < run.header.duration * (1.0 - 1e-9):
        return (
            "No hand calculation stands beside the answers: the run did not reach its end, and "
            "formulas speak of the end."
        )
    return "No formula that driftwell knows answers one of these questions."


def _formulas(matter: Matter) -> Markup:
    """All that can be worked out by hand, folded."""
    groups: dict[Formula, list[HandValue]] = {}
    for value in matter.by_hand:
        groups.setdefault(value.formula, []).append(value)
    if not groups:
        return NOTHING
    return folded(
        "All that can be worked out by hand of the scenario as it begins, with formulas, "
        f"ranges and sources ({len(groups)})",
        joined(_formula(formula, values) for formula, values in groups.items()),
    )


def _formula(formula: Formula, values: list[HandValue]) -> Markup:
    rows = [
        [
            each.what,
            amount(each.value, each.unit),
            f"{'within' if each.inside else 'outside'} its range: {each.why}",
        ]
        for each in values
    ]
    columns = [Column("quantity"), Column("value", number=True), Column("range")]
    return together(
        tag("h3", formula.name),
        tag("p", tag("code", formula.equation)),
        table(f"Holds for {formula.range}. Source: {formula.source}", columns, rows),
    )
