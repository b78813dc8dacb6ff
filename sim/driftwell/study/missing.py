"""Which runs of a study are not there yet, by the catalogue and by the runs' own folders."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.errors import DriftwellError, RecordError
from driftwell.record.reader import open_run
from driftwell.run import ALL_LOST, FAILED, FINISHED
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.study.needed import Catalogue, Study
from driftwell.study.sweep_folder import run_folder
from driftwell.study.tally import THERE, Tally

ANSWERED = frozenset({FINISHED, ALL_LOST})
"""How a run may end that answers its questions: that everything was lost is an answer."""


@dataclass(frozen=True, slots=True)
class Missing:
    """A run that is to be computed.

    fresh : whether to start over, since it failed before
    """

    loaded: LoadedScenario
    fresh: bool


@dataclass(frozen=True, slots=True)
class _Ending:
    word: str = ""
    sentence: str = ""
    answers: tuple[Answer, ...] = ()


def missing_runs(
    study: Study, folder: Path, catalogue: Catalogue, tally: Tally, retry_failed: bool
) -> Iterator[Missing | None]:
    """For each case the run that is missing; None where it is there, or cannot be.

    What is there or cannot be is entered into `tally`. A run whose motion could not be continued
    would end the same way again: it is started over only where `retry_failed`.
    """
    known = {
        row.digest: _Ending(row.word, row.sentence, tuple(row.answers))
        for row in catalogue.rows()
        if row.word in {*ANSWERED, FAILED}
    }
    for case in study.cases:
        try:
            loaded = read_scenario(study.scenario_path, case.settings)
        except DriftwellError as fault:
            tally.refused(case, str(fault))
            yield None
            continue
        digest = loaded.digest
        catalogue.add(digest, case.number, case.settings)
        if not tally.joins(case, digest):
            yield None
            continue
        ending = known.get(digest) or _recorded(folder, digest, catalogue)
        if ending.word in ANSWERED:
            tally.answered(digest, ending.answers, THERE)
            yield None
        elif ending.word == FAILED and not retry_failed:
            tally.failed(digest, ending.sentence, before=True)
            yield None
        else:
            yield Missing(loaded, ending.word == FAILED)


def _recorded(folder: Path, digest: str, catalogue: Catalogue) -> _Ending:
    """How the run ended, by its own folder; the catalogue is told."""
    place = run_folder(folder, digest)
    try:
        found = open_run(place) if place.is_dir() else None
    except RecordError:  # damaged, or nothing sealed yet: the run will say so, or begin
        found = None
    if found is None or found.header.digest != digest:
        return _Ending()
    outcome = found.outcome
    if outcome.word not in {*ANSWERED, FAILED}:
        return _Ending()
    catalogue.ended(digest, outcome.word, outcome.sentence, outcome.wall_time, found.answers)
    return _Ending(outcome.word, outcome.sentence, found.answers)
