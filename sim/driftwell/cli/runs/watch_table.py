"""The table that ``driftwell watch`` shows: a row for each run, as wide and high as is room for."""

from __future__ import annotations

import unicodedata
from collections import Counter
from collections.abc import Sequence
from dataclasses import dataclass

from driftwell.cli.terminal.clock import by_the_clock, lasting
from driftwell.cli.terminal.printing import shown
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.record.condition import Condition

_FIRST = ("going on", "silent", "begun", "cut off", "unknown", "failed")
"""What a user should see first; what else there is comes last."""
_BAR = 20
_NAME = 24
_GAP = "  "
_HEADS = ("run", "state", "done", "reached", "charges", "residual", "finish")
_DROPPED = ("reached", "charges", "residual", "finish")
"""Columns that are left out where the lines are too short, the first one first."""


@dataclass(frozen=True, slots=True)
class Row:
    """One run: its name, and what has become of it."""

    name: str
    condition: Condition


def table(rows: Sequence[Row], title: str, columns: int, lines: int | None = None) -> list[str]:
    """The lines that show all runs; of so many at most, the most urgent ones.

    title : of a sweep, which has a line of counts; empty for a single run
    """
    if not rows:
        return [fitted(f"{title}: no run has begun yet", columns)]
    rows = sorted(rows, key=_urgency)
    heading = [fitted(f"{counts(rows)}  ({title})", columns)] if title else []
    notes = _notes(rows, columns)
    if lines is None:
        return [*heading, *_laid_out(rows, columns), *notes]
    # a half of the room is for notes, where there are so many
    most = max(lines - len(heading) - 1, 2)  # a line is the head
    notes = _cut(notes, max(most // 2, most - len(rows)))
    room = most - len(notes)
    kept = rows if len(rows) <= room else rows[: max(room - 1, 1)]
    body = _laid_out(kept, columns)
    if len(kept) < len(rows):
        body.append(fitted(f"... and {counts(rows[len(kept) :])}", columns))
    return [*heading, *body, *notes][: max(lines, 1)]


def counts(rows: Sequence[Row]) -> str:
    """How many runs are how far, in words."""
    found = Counter(row.condition.word for row in rows)
    words = ", ".join(f"{number} {word}" for word, number in found.most_common())
    return f"{len(rows)} run{'s' * (len(rows) != 1)}: {words}"


def fitted(text: str, columns: int) -> str:
    """The text on one line of at most so many cells of a terminal."""
    text = shown(text).replace("\n", " ")
    if cells(text) <= columns:
        return text
    kept = ""
    for character in text:
        if cells(kept + character) > columns - 1:
            break
        kept += character
    return kept + "~"


def cells(text: str) -> int:
    """Cells that a text takes in a terminal: wide characters take two, marks upon others none."""
    if text.isascii():
        return len(text)
    return sum(
        0 if unicodedata.combining(c) else 2 if unicodedata.east_asian_width(c) in "WF" else 1
        for c in text
    )


def _urgency(row: Row) -> tuple[int, str]:
    word = row.condition.word
    return _FIRST.index(word) if word in _FIRST else len(_FIRST), row.name


def _laid_out(rows: Sequence[Row], columns: int) -> list[str]:
    """A head and the rows beneath it, in as many columns as there is room for.

    A single run has a bar, where there is room for all columns with it.
    """
    found: list[dict[str, str]] = []
    lines: list[str] = []
    for bar, dropped in ((len(rows) == 1, 0), *((False, k) for k in range(len(_DROPPED) + 1))):
        found = [_entries(row, bar) for row in rows]
        heads = [
            head
            for head in _HEADS
            if head not in _DROPPED[:dropped] and any(entry[head] for entry in found)
        ]
        widths = {head: max(cells(entry[head]) for entry in (_HEAD, *found)) for head in heads}
        lines = [
            _GAP.join(_padded(entry[head], widths[head]) for head in heads).rstrip()
            for entry in (_HEAD, *found)
        ]
        if max(map(cells, lines)) <= columns:
            return lines
    return [fitted(line, columns) for line in lines]


_HEAD = {head: head for head in _HEADS}


def _padded(text: str, width: int) -> str:
    return text + " " * (width - cells(text))


def _entries(row: Row, bar: bool) -> dict[str, str]:
    """The row by columns, with a bar or without."""
    condition, sign = row.condition, row.condition.sign
    entries = dict.fromkeys(_HEADS, "")
    entries |= {"run": fitted(row.name, _NAME), "state": condition.word}
    if sign is None:
        return entries
    part = min(max(sign.time / sign.duration, 0.0), 1.0) if sign.duration > 0.0 else 1.0
    # never 100 % before the end
    done = f"{min(100.0 * part, 100.0 if part == 1.0 else 99.9):.1f} %"
    if bar:
        filled = int(_BAR * part)
        done = f"[{'#' * filled}{'.' * (_BAR - filled)}] {done}"
    residual = sign.energy_residual
    entries |= {
        "done": done,
        "reached": f"{spelled(sign.time, 's', 3)} of {spelled(sign.duration, 's', 3)}",
        "charges": f"{sign.alive}/{sign.born}",
        "residual": "not a number" if residual is None else f"{residual:.0e}",
    }
    if condition.state == "going on" and sign.left is not None:
        entries["finish"] = by_the_clock(max(sign.left - condition.age, 0.0))
    elif condition.state == "ended":
        entries["finish"] = f"after {lasting(sign.stepping)}"
    return entries


def _notes(rows: Sequence[Row], columns: int) -> list[str]:
    """What the user should know or do, for each run of which there is something to say."""
    return [
        line
        for row in rows
        if row.condition.note
        for line in paragraph(
            shown(f"{row.name}: {row.condition.word}; {row.condition.note}"), columns, rest="  "
        )
    ]


def _cut(lines: list[str], most: int) -> list[str]:
    if len(lines) <= most:
        return lines
    return [*lines[: max(most - 1, 0)], "..."] if most > 0 else []
