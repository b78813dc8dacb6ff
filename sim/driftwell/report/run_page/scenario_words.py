"""The scenario in words, and its text."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import groupby

from driftwell.errors import DriftwellError
from driftwell.report.again import Again
from driftwell.report.page.markup import Markup, joined, tag, together
from driftwell.report.page.section import Section, folded
from driftwell.scenario.explain import notes, rows


def scenario_words(again: Again, text: str, settings: Sequence[str]) -> Section:
    """What was simulated: one line for each thing; then the file, folded."""
    parts = [told(again)]
    if settings:
        given = joined((tag("code", each) for each in settings), ", ")
        parts.append(tag("p", "Set beside the file: ", given))
    lines = text.count("\n") + 1
    parts.append(
        folded(f"The scenario file, as given ({lines} lines)", tag("pre", tag("code", text)))
    )
    return Section("scenario", "The scenario in words", together(*parts))


def told(again: Again) -> Markup:
    """One line for each thing that was simulated, and remarks."""
    if again.loaded is None:
        return tag("p", f"It cannot be put into words: {again.why}. Its text is below.")
    try:
        found = list(rows(again.loaded))
        remarks = list(notes(again.loaded))
    except DriftwellError as fault:
        return tag("p", f"It cannot be put into words ({fault}). Its text is below.")
    entries = []
    for section, those in groupby(found, key=lambda row: row[0]):
        what = [
            tag("div", tag("strong", name), ": " if name else "", words)
            if name
            else tag("div", words)
            for _, name, words in those
        ]
        entries.append(tag("div", tag("dt", section), tag("dd", joined(what))))
    lines = tag("dl", joined(entries))
    return together(lines, *(tag("p", tag("strong", "Note: "), each) for each in remarks))
