"""Runs of a study as its page needs them: links to their reports, one of them opened."""

from __future__ import annotations

from collections.abc import Iterable
from pathlib import Path

from driftwell.errors import DriftwellError
from driftwell.record.reader import Run, open_run
from driftwell.report.page.markup import Markup, tag
from driftwell.study.catalogue import Row
from driftwell.study.missing import ANSWERED
from driftwell.study.sweep_folder import RUNS, run_folder

REPORT = "report.html"


def linked(folder: Path, target: Path, digest: str, words: str) -> Markup | str:
    """The words, as a link to the run's own report where that is there.

    Only a report that lies in the study's folder has links: elsewhere they would lead nowhere once
    it was sent, and tell where the folder lies.
    """
    if not digest or target.absolute().parent != folder.absolute():
        return words
    place = run_folder(Path(), digest)
    if not (folder / place / REPORT).is_file():
        return words
    return tag("a", words, href=f"{RUNS}/{place.name}/{REPORT}")


def first_run(folder: Path, rows: Iterable[Row]) -> Run | None:
    """The first run that has come to its end and can be read; None where there is none."""
    for row in rows:
        if row.word in ANSWERED:
            try:
                return open_run(run_folder(folder, row.digest))
            except DriftwellError:
                continue
    return None
