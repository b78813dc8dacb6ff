"""The search for a limit, led the same way again by the answers that are in its folder.

A search depends on nothing but the answers of its runs, so it comes to the same verdict.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from driftwell.study.again.folder import kept_study
from driftwell.study.catalogue import RUNNING, WAITING, Catalogue, Row
from driftwell.study.limit_noise import Reading
from driftwell.study.limit_run import Evaluation, Searched, limit_of, watched
from driftwell.study.limit_search import Search, Wanted
from driftwell.study.missing import ANSWERED
from driftwell.study.points import Case
from driftwell.study.progress import Failure
from driftwell.study.sweep_folder import CATALOGUE_FILE

_NOT_YET = (WAITING, RUNNING, "stopped")


def limit_again(folder: Path) -> Searched:
    """What the search in a folder has come to; without a verdict where it was stopped before.

    Raises RecordError where it cannot be read, StudyError where it searches for nothing.
    """
    with Catalogue(folder / CATALOGUE_FILE, read_only=True) as catalogue:
        rows = {row.number: row for row in catalogue.rows()}
    study = kept_study(folder, tuple(rows.values()))
    search = Search(limit_of(study))
    made: list[Evaluation] = []
    while wanted := search.next():
        numbers = range(len(made) + 1, len(made) + 1 + len(wanted))
        if not _there(rows, numbers):
            break
        for number, each in zip(numbers, wanted, strict=True):
            made.append(_evaluation(each, rows.get(number), search))
            answer = made[-1].answer
            search.learn(each, None if answer is None else Reading(answer.value, answer.error))
    known = [rows[number] for number in range(1, len(made) + 1) if number in rows]
    failures = tuple(
        Failure(row.number, row.settings, row.sentence) for row in known if row.word not in ANSWERED
    )
    cases = tuple(
        Case(row.number, row.settings, (each.wanted.place.value,), each.wanted.replica)
        for number, each in enumerate(made, 1)
        if (row := rows.get(number)) is not None
    )
    return Searched(
        replace(study, cases=cases or study.cases),
        search,
        tuple(made),
        search.verdict,
        failures,
        0,
        sum(row.wall_time or 0.0 for row in known),
    )


def _there(rows: dict[int, Row], numbers: range) -> bool:
    """Whether all runs of a round have ended; a case that was no scenario has no row."""
    found = [rows[number] for number in numbers if number in rows]
    return bool(found) and all(row.word not in _NOT_YET for row in found)


def _evaluation(wanted: Wanted, row: Row | None, search: Search) -> Evaluation:
    if row is None:
        return Evaluation(wanted, "", None)
    answers = row.answers if row.word in ANSWERED else ()
    return Evaluation(wanted, row.digest, watched(answers, search.asked))
