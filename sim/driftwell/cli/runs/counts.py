"""What `driftwell estimate` prints without timing anything: a run, or a sweep, in numbers."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from driftwell.cli.terminal.clock import lasting
from driftwell.counted import Count
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph
from driftwell.scenario.room import free_memory, free_space, in_words

_COLUMN = 9
_FEW = 0.01
"""Part of the disk that losses and passages must take to be spoken of."""
_WORTH = 0.1
"""s of pairs, from which on they are spoken of."""


def count_lines(found: Count, columns: int) -> list[str]:
    """A run in numbers, in lines of at most so many characters."""
    rows = [("charges", _charges(found))]
    if found.steps is None:
        rows.append(
            (
                "steps",
                "follow from the field of the electrodes, which is not solved yet: --measure, or "
                "`driftwell fields`, solves it. Memory and disk are without what follows from them",
            )
        )
    else:
        rows.append(
            ("steps", f"{found.steps}, of at most {spelled(found.step, 's', 4)}: {found.because}")
        )
    rows += [
        (
            "records",
            f"{counted_in_words(found.records, 'record')} and "
            f"{counted_in_words(found.snapshots, 'snapshot')}",
        ),
        ("memory", memory_in_words(found.memory)),
        ("disk", disk_in_words(found.disk, found.events)),
        ("time", _time(found.least)),
    ]
    return laid_out(rows, columns)


def _charges(found: Count) -> str:
    born = f", {found.born} of them born on the way" if found.born else ""
    return f"{found.charges}{born}; {found.method}"


def _time(least: float | None) -> str:
    if least is None or least < _WORTH:
        return "not timed: --measure times the first steps"
    return (
        f"at least {lasting(least)}, by the pairs alone at 1e9 a second on each thread; --measure "
        "times the first steps"
    )


def laid_out(rows: Sequence[tuple[str, str]], columns: int) -> list[str]:
    """Names, and beside them what is said."""
    return [
        line
        for name, words in rows
        for line in paragraph(words, columns, name.ljust(_COLUMN), " " * _COLUMN)
    ]


def memory_in_words(needed: int) -> str:
    """Bytes of memory, and how many are free."""
    free = free_memory()
    text = f"about {in_words(needed)}"
    return text if free is None else f"{text}; {in_words(free)} are free"


def disk_in_words(needed: int, events: int) -> str:
    """Bytes of a record, what losses may add, and how many are free."""
    text = f"about {in_words(needed)}"
    if events > _FEW * needed:
        text += f", and {in_words(events)} more if every charge meets every surface once"
    space = free_space(Path())
    if space is None:
        return text
    text += f"; {in_words(space)} are free here"
    if needed > space:
        text += ", too little: record less often, or name a folder on a larger disk with -o"
    return text


def counted_in_words(number: int, noun: str) -> str:
    """``3 records``."""
    return f"{number} {noun}{'s' * (number != 1)}"
