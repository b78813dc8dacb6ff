"""A search carried out: its runs go through the sweep's catalogue, round by round.

Each round is a sweep of all runs wanted so far: those of earlier rounds are in the catalogue, the
others are computed. A search that was cut off is told the same answers again when it is begun anew,
and goes on where it was. Workers are kept from one round to the next.
"""

from __future__ import annotations

from collections.abc import Callable
from contextlib import closing
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Protocol

from driftwell.answers.answer import Answer
from driftwell.errors import StudyError
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings, setting_text
from driftwell.scenario.source import raw_table, shown_path
from driftwell.study.catalogue import Catalogue
from driftwell.study.cores import Load, Sharing, shared, usable_cores
from driftwell.study.engine import Engine
from driftwell.study.kept_engine import KeptEngine
from driftwell.study.limit_asked import Asked
from driftwell.study.limit_noise import Reading
from driftwell.study.limit_search import Search, Verdict, Wanted
from driftwell.study.points import Case, own_seed
from driftwell.study.pool import Pool
from driftwell.study.progress import Failure, SweepObserver
from driftwell.study.read import Study
from driftwell.study.sweep import Sweep


class LimitObserver(SweepObserver, Protocol):
    """Who watches a search."""

    def looks(self, search: Search, wanted: int) -> None:
        """A round begins, with so many runs."""


@dataclass(frozen=True, slots=True)
class Evaluation:
    """One run of a search.

    digest : of its scenario; empty where it was no scenario
    answer : to the question watched; None where there is none
    """

    wanted: Wanted
    digest: str
    answer: Answer | None


@dataclass(frozen=True, slots=True)
class Searched:
    """What a search came to.

    study : with the cases of all runs made
    verdict : None where it was stopped before there was one
    computed : runs computed now, not found in the catalogue; busy : s, that they took in all
    """

    study: Study
    search: Search
    evaluations: tuple[Evaluation, ...]
    verdict: Verdict | None
    failures: tuple[Failure, ...]
    computed: int
    busy: float


def find_limit(
    study: Study,
    folder: Path,
    catalogue: Catalogue,
    observer: LimitObserver,
    *,
    retry_failed: bool = False,
    workers: int | None = None,
    threads: int | None = None,
    engine_of: Callable[[int, int], Engine] = Pool.of_runs,
    sharing_of: Callable[[Load, int | None, int | None], Sharing] | None = None,
) -> Searched:
    """Search for the limit a study asks for; arguments as those of a :class:`Sweep`.

    Raises
    ------
    StudyError
        The study has no ``[limit]``.
    """
    asked = limit_of(study)
    search = Search(asked)
    seed = _seed_of(study)
    evaluations: list[Evaluation] = []
    failures: tuple[Failure, ...] = ()
    computed, busy = 0, 0.0
    shares = _Shares(asked, sharing_of)
    with closing(KeptEngine(engine_of)) as kept:
        while wanted := search.next():
            observer.looks(search, len(wanted))
            every = [*(each.wanted for each in evaluations), *wanted]
            study = replace(study, cases=tuple(_cases(study, asked, seed, every)))
            found = Sweep(
                study,
                folder,
                catalogue,
                observer,
                retry_failed=retry_failed,
                workers=workers,
                threads=threads,
                engine_of=kept.engine,
                sharing_of=shares.sharing,
            ).result()
            computed += found.progress.computed
            busy += found.busy
            failures = found.failures
            if found.stopped:
                return Searched(study, search, tuple(evaluations), None, failures, computed, busy)
            for number, each in enumerate(wanted, len(evaluations) + 1):
                digest = found.digests.get(number, "")
                answer = watched(found.answers.get(digest, ()), asked)
                evaluations.append(Evaluation(each, digest, answer))
                search.learn(each, None if answer is None else Reading(answer.value, answer.error))
            retry_failed = False
    return Searched(study, search, tuple(evaluations), search.verdict, failures, computed, busy)


def limit_of(study: Study) -> Asked:
    """What the study searches for.

    Raises
    ------
    StudyError
        It searches for nothing.
    """
    if study.limit is None:
        raise StudyError(
            f"{shown_path(study.path)}: has no [limit]. `driftwell limit` needs one, with the key "
            "that is to be limited; `driftwell sweep` computes what [[vary]] asks for."
        )
    return study.limit


def _seed_of(study: Study) -> int:
    """The scenario's own seed, with the study's settings."""
    data = raw_table(study.scenario_text, shown_path(study.scenario_path))
    apply_settings(data, study.settings, Scenario)
    return own_seed(data)


def _cases(study: Study, asked: Asked, seed: int, every: list[Wanted]) -> list[Case]:
    found = []
    for number, each in enumerate(every, 1):
        own = [each.place.setting]
        if asked.form.noise != "none":
            own.append(setting_text("seed", asked.seed(seed, each.place, each.replica)))
        settings = (*study.settings, *own)
        found.append(Case(number, settings, (each.place.value,), each.replica))
    return found


def watched(answers: tuple[Answer, ...], asked: Asked) -> Answer | None:
    """The answer to the question whose value is limited; None where there is none."""
    return next((each for each in answers if each.name == asked.form.answer), None)


class _Shares:
    """How the cores are shared: settled once, as if each round had as many runs as it may."""

    def __init__(
        self,
        asked: Asked,
        sharing_of: Callable[[Load, int | None, int | None], Sharing] | None,
    ) -> None:
        self._asked = asked
        self._sharing_of = sharing_of
        self._settled: Sharing | None = None

    def sharing(self, load: Load, workers: int | None, threads: int | None) -> Sharing:
        """As :func:`driftwell.study.cores.shared`."""
        if self._settled is None:
            load = replace(load, left=max(load.left, self._asked.form.at_once))
            self._settled = (
                shared(load, usable_cores(), workers, threads)
                if self._sharing_of is None
                else self._sharing_of(load, workers, threads)
            )
        return self._settled
