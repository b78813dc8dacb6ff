"""Write docs/record-format.md from the layout table: `python tools/record_format.py [--check]`."""

from __future__ import annotations

import sys
from collections.abc import Iterable
from pathlib import Path

from driftwell.record.claim import SCENARIO_FILE
from driftwell.record.heartbeat import EVERY, PROGRESS_FILE
from driftwell.record.index import SEGMENTS
from driftwell.record.layout import (
    ANSWERS,
    FIXED,
    FORMAT_VERSION,
    HEADER,
    INDEX,
    OUTCOME,
    ROWS,
    SEGMENT,
    SNAPSHOT,
    Attribute,
    Dataset,
)
from driftwell.record.lock import LOCK
from driftwell.record.master import ANSWERS_FILE, LAST_FILE, MASTER

PAGE = Path(__file__).resolve().parent.parent / "docs" / "record-format.md"

INTRODUCTION = f"""\
# What a run's folder holds

Format {FORMAT_VERSION}. This page is written by `tools/record_format.py` from the table that the
writer and the reader follow (`record/layout.py`); change the table, not the page.

| file | what it is |
| --- | --- |
| `{SCENARIO_FILE}` | the scenario, as given |
| `{SEGMENTS}/000001.h5`, `000002.h5`, ... | the record, cut in time; each file is written once |
| `{MASTER}` | the master: shows all segments in one piece; replaced as a whole at each segment |
| `{ANSWERS_FILE}` | answers and outcome; there once the run has ended or was stopped |
| `{LAST_FILE}` | of a run that was stopped or failed: a snapshot at its last record |
| `{PROGRESS_FILE}` | how far the run is, for whoever watches it; no part of the record |
| `{LOCK}` | which process works in the folder; there meanwhile, or after a kill |

A file ending in `.part` was being written when the run was cut off; it is not part of the record.
When the run goes on, `{ANSWERS_FILE}` and such files are removed; `{LAST_FILE}` at its next record.
All paths inside the files are relative, so a folder can be moved or copied as a whole.

From Python, `driftwell.open_run(folder)` reads the folder and says what is damaged. Any HDF5 reader
can open `{MASTER}`: datasets that grow are virtual datasets over the segments; `snapshot/1`,
`state`, `answers` and `outcome` are external links. A plain HDF5 reader shows zeros, or "not a
number", where a segment's file is missing: keep the folder together.

All numbers are SI, little-endian, 64 bits. Each dataset names its unit in the attribute `unit`,
each table the units of its columns in `units`, and both their meaning in `help`. Texts in tables,
and in the attributes below, are UTF-8 of fixed size. Unit 1 marks a pure number. Data carry
fletcher32 checksums and are not compressed.
"""

STATE = """\
## State

The group `state` of each segment holds all that is needed to go on from where it was sealed, at a
record or between two: the particles under `state/particles/` (the arrays of the program, `position`
and `velocity` as (3, n), m and m/s; with them those lost since the last record, told by
`state/charges/alive`), the position in the schedule as whole numbers, and the accounts with what
rounding dropped from them. A segment sealed between two records may hold losses, passages and
samples later than its last record. Names and types are kept as given and read back bit for bit
(`open_run(folder).state()`). The master links the newest state.
"""

PROGRESS = f"""\
## Progress

`{PROGRESS_FILE}` is a JSON table, replaced as a whole every {EVERY:g} s or more while the run goes
on, and once at its end. Nothing depends on it: it is not forced to disk, may be missing or old, and
may be removed. Lengths of time are measured by a clock that only goes forward.

| key | unit | meaning |
| --- | --- | --- |
| `time`, `duration` | s | how far the motion was followed, and how far it is to be |
| `steps`, `all_steps` | 1 | steps taken, and of the whole run |
| `alive`, `born` | 1 | simulated charges left, and all there ever were |
| `energy_residual` | 1 | at the last record; null where it is not a number |
| `outcome`, `sentence` | | how the run ended; empty while it goes on |
| `process`, `host` | | number of the process, name of the machine |
| `mark` | | tells the process from later ones of its number |
| `start`, `stamp` | s | time of day (Unix) of the first writing and of this one |
| `stepping` | s | since the first writing |
| `gap` | s | the longest time between two writings |
| `left` | s | that the run will take at its present pace; null where that is not known |
"""


def page() -> str:
    """The whole page."""
    parts = [
        INTRODUCTION,
        "## Attributes of the master and of every segment\n\n" + _attributes(HEADER),
        "Segments have besides:\n\n" + _attributes(SEGMENT),
        "## Datasets that grow\n\nEach segment holds the next rows; the master shows them all.\n",
        *map(_dataset, ROWS),
        "## Datasets that stay the same\n\nIn the master and in every segment.\n",
        *map(_dataset, FIXED),
        "## Snapshots\n\nEach group `snapshot/1`, `snapshot/2`, ... holds every charge alive at "
        "one time:\n\n" + _plain(SNAPSHOT),
        STATE,
        "## Index\n\nWhich file holds what, in the master only.\n",
        *map(_dataset, INDEX),
        "## Answers\n",
        _dataset(ANSWERS),
        f"The group `outcome` in `{ANSWERS_FILE}` has the attributes:\n\n" + _attributes(OUTCOME),
        PROGRESS,
    ]
    return "\n".join(parts)


def _table(head: str, rows: Iterable[tuple[str, ...]]) -> str:
    titles = head.split()
    lines = [titles, ["---"] * len(titles), *([c.replace("|", "\\|") for c in r] for r in rows)]
    return "".join(f"| {' | '.join(line)} |\n" for line in lines)


def _attributes(entries: Iterable[Attribute]) -> str:
    return _table(
        "attribute type unit meaning",
        ((f"`{each.name}`", each.kind, each.unit, each.help) for each in entries),
    )


def _shape(lengths: Iterable[str | int]) -> str:
    return ", ".join(str(length) for length in lengths)


def _plain(entries: Iterable[Dataset]) -> str:
    return _table(
        "dataset type shape unit meaning",
        (
            (f"`{each.path}`", each.kind, f"({_shape(each.shape)})", each.unit, each.help)
            for each in entries
        ),
    )


def _dataset(entry: Dataset) -> str:
    if not entry.columns:
        return _plain([entry])
    return f"### `{entry.path}` ({_shape(entry.shape)})\n\n{entry.help}\n\n" + _table(
        "column type shape unit meaning",
        (
            (f"`{each.name}`", each.kind, _shape(each.shape), each.unit, each.help)
            for each in entry.columns
        ),
    )


def main(arguments: list[str]) -> int:
    """Write the page, or with --check say whether it is fresh."""
    if "--check" not in arguments:
        PAGE.write_text(page(), encoding="utf-8")
        return 0
    if PAGE.is_file() and PAGE.read_text(encoding="utf-8") == page():
        return 0
    sys.stderr.write(f"{PAGE.name} is stale: run `python tools/record_format.py`.\n")
    return 1


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))
