"""What notebooks show of scenarios, runs and answers. All text is escaped."""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from html import escape
from typing import TYPE_CHECKING

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import common_lines, reading
from driftwell.errors import DriftwellError
from driftwell.forms import spelled

if TYPE_CHECKING:
    from driftwell.api.run import Run
    from driftwell.api.scenario import Scenario

_BOX = (
    "border-left:3px solid {colour};padding:.2em .8em;margin:.3em 0;max-width:60em;"
    "font-size:.95em;line-height:1.45"
)
_CELL = "text-align:left;padding:.1em 1em .1em 0"
_PLAIN, _DOUBT = "#0072b2", "#d55e00"
"""Blue and vermilion that colour-blind readers tell apart; words say the same besides."""
_MOST = 50
"""Rows that are shown, at the most."""
_WIDTH = 10_000
"""Characters of a line: the notebook breaks them itself."""


def scenario_html(scenario: Scenario) -> str:
    """A scenario in words, or all its faults."""
    faults = scenario.faults()
    if faults:
        count = f"{len(faults)} fault{'s' * (len(faults) != 1)}"
        items = "".join(f"<li>{escape(each)}</li>" for each in faults[:_MOST])
        title = escape(scenario.title or "a scenario")
        return _box(f"<b>{title}</b>: {count}<ul style='margin:.2em 0'>{items}</ul>", _DOUBT)
    words = scenario.explain()
    title, _, rest = words.partition("\n")
    return _box(f"<b>{escape(title)}</b>{_text(rest)}", _PLAIN)


def run_html(run: Run) -> str:
    """How a run ended, its answers with their errors, and what is to be said against it."""
    header, outcome = run.header, run.outcome
    parts = [
        f"<b>{escape(header.title)}</b>",
        f"<div><b>{escape(outcome.word)}</b>: {escape(outcome.sentence)}</div>",
        f"<div>{escape(_numbers(run))}</div>",
    ]
    if run.answers:
        parts.append(answers_table(run.answers))
    doubts: Sequence[str] = ()
    if outcome.exit_code is not None:
        try:
            found = run.judgement
            doubts = [f"{each.name}: {each.sentence}" for each in found]
            grave = any(each.grave for each in found)
        except DriftwellError as fault:
            doubts, grave = [str(fault)], True
        if doubts:
            items = "".join(f"<li>{escape(each)}</li>" for each in doubts)
            parts.append(f"<div>Judgement<ul style='margin:.2em 0'>{items}</ul></div>")
        else:
            parts.append("<div>Judgement: nothing found amiss</div>")
        return _box("".join(parts), _DOUBT if grave else _PLAIN)
    return _box("".join(parts), _PLAIN)


def answers_html(answers: Iterable[Answer]) -> str:
    """Answers as a table."""
    return _box(answers_table(answers), _PLAIN)


def answers_table(answers: Iterable[Answer]) -> str:
    """Rows of name, value with error and unit, and note; what is common to them below."""
    answers, rows = tuple(answers), []
    for each in answers:
        read = reading(each)
        value = read.value + (f" ± {read.error}" if read.error else "")
        cells = (each.name, f"{value} {read.unit}".strip(), each.note)
        style = "" if math.isfinite(each.value) else f" style='color:{_DOUBT}'"
        rows.append(
            f"<tr{style}>"
            + "".join(
                f"<td style='{_CELL};white-space:{wrap}'>{escape(cell)}</td>"
                for cell, wrap in zip(cells, ("normal", "nowrap", "normal"), strict=True)
            )
            + "</tr>"
        )
    heads = "".join(
        f"<th scope='col' style='text-align:left;padding-right:1em'>{head}</th>"
        for head in ("question", "answer", "note")
    )
    table = f"<table><thead><tr>{heads}</tr></thead><tbody>{''.join(rows)}</tbody></table>"
    common = "".join(f"<div>{escape(line)}</div>" for line in common_lines(answers, _WIDTH))
    return table + common


def _numbers(run: Run) -> str:
    """What it holds, in a line."""
    reached, whole = spelled(run.end_time, "s"), spelled(run.header.duration, "s")
    charges = sum(cloud.count for cloud in run.header.clouds)
    records = run.positions.shape[0]
    text = f"{reached} of {whole}; {charges} charges, {records} records; {run.folder}"
    ledger = run.ledger
    if len(ledger):
        text += f"; energy residual {ledger['energy_residual'][-1]:.1e}"
    return text


def _text(lines: str) -> str:
    return (
        "<pre style='margin:.3em 0;font-size:.85em;line-height:1.35;background:none;"
        f"overflow-x:auto'>{escape(lines)}</pre>"
    )


def _box(inner: str, colour: str) -> str:
    return f"<div style='{_BOX.format(colour=colour)}'>{inner}</div>"
