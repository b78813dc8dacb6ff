"""Which runs of a study are not there yet, by the catalogue and by the runs' own folders."""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass, replace
from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.errors import DriftwellError, RecordError
from driftwell.record.reader import open_run
from driftwell.run import ALL_LOST, FAILED, FINISHED
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.scenario.room import extent_of, free_memory
from driftwell.study.catalogue import Catalogue
from driftwell.study.cores import Load, threads_pay_from
from driftwell.study.points import Case
from driftwell.study.read import Study
from driftwell.study.sweep_folder import run_folder
from driftwell.study.tally import THERE, Tally

ANSWERED = frozenset({FINISHED, ALL_LOST})
"""How a run may end that answers its questions: that everything was lost is an answer."""
_ENDED = frozenset({*ANSWERED, FAILED})


@dataclass(frozen=True, slots=True)
class Needed:
    """A run that answers one or several cases.

    settings : of the first of them
    charges, memory : how many it has, and the bytes it takes
    pays : from how many charges on it gains by threads
    fresh : whether to start over, since it failed before
    """

    digest: str
    settings: tuple[str, ...]
    charges: int
    memory: int
    pays: int
    fresh: bool = False


@dataclass(frozen=True, slots=True)
class _Ending:
    word: str = ""
    sentence: str = ""
    answers: tuple[Answer, ...] = ()


def missing_runs(
    study: Study,
    folder: Path,
    catalogue: Catalogue,
    tally: Tally,
    retry_failed: bool,
    goes_on: Callable[[], bool],
) -> list[Needed]:
    """The runs that are missing, in the order of the cases; none where it is asked to stop.

    All cases are entered into the catalogue. What is there or cannot be is entered into `tally`. A
    run whose motion could not be continued would end the same way again: it is started over only
    where `retry_failed`.

    goes_on : asked between two cases
    """
    runs: dict[str, Needed] = {}
    cases: list[tuple[str, Case]] = []
    for case in study.cases:
        if not goes_on():
            return []
        try:
            needed = needed_by(read_scenario(study.scenario_path, case.settings))
        except DriftwellError as fault:
            tally.refused(case, str(fault))
            continue
        cases.append((needed.digest, case))
        runs.setdefault(needed.digest, needed)
        tally.joins(case, needed.digest)
    catalogue.add_all((digest, case.number, case.settings) for digest, case in cases)
    known = {
        row.digest: _Ending(row.word, row.sentence, tuple(row.answers))
        for row in catalogue.rows()
        if row.word in _ENDED
    }
    missing = []
    for digest, needed in runs.items():
        ending = known.get(digest) or _recorded(folder, digest, catalogue)
        if ending.word in ANSWERED:
            tally.answered(digest, ending.answers, THERE)
        elif ending.word != FAILED:
            missing.append(needed)
        elif retry_failed:
            missing.append(replace(needed, fresh=True))
        else:
            tally.failed(digest, ending.sentence, before=True)
    return missing


def needed_by(loaded: LoadedScenario) -> Needed:
    """What is to be known of a run before it is begun."""
    scenario = loaded.scenario
    charges = scenario.charges(loaded.folder)
    return Needed(
        loaded.digest,
        loaded.settings,
        charges,
        extent_of(scenario, charges).memory(),
        threads_pay_from(scenario.coulomb),
    )


def load_of(runs: Collection[Needed]) -> Load:
    """What is to be shared among the cores; at least one run."""
    return Load(
        left=len(runs),
        charges=max(each.charges for each in runs),
        pays=min(each.pays for each in runs),
        memory=max(each.memory for each in runs),
        free=free_memory(),
    )


def _recorded(folder: Path, digest: str, catalogue: Catalogue) -> _Ending:
    """How the run ended, by its own folder; the catalogue is told."""
    place = run_folder(folder, digest)
    try:
        found = open_run(place) if place.is_dir() else None
    except RecordError:  # damaged, or nothing sealed yet: the run will say so, or begin
        found = None
    if found is None or found.header.digest != digest or found.outcome.word not in _ENDED:
        return _Ending()
    outcome = found.outcome
    catalogue.ended(digest, outcome.word, outcome.sentence, outcome.wall_time, found.answers)
    return _Ending(outcome.word, outcome.sentence, found.answers)
