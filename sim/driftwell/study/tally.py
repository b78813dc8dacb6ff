"""Which case of a study has which run, and what became of it.

Cases of the same content share one run: it is computed once, and counts for each of them.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from driftwell.answers.answer import Answer
from driftwell.study.points import Case
from driftwell.study.progress import Failure, SweepProgress

THERE, COMPUTED, FAILED = "there", "computed", "failed"
"""What can become of a case: answered before, answered now, none of both."""


@dataclass(frozen=True, slots=True)
class _Fate:
    what: str
    reason: str = ""
    before: bool = False


class Tally:
    """The account of the cases.

    cases : of the whole study
    tell : is given each failure
    digests : of the runs, by the numbers of their cases
    answers : of the runs that have any, by their digests
    """

    def __init__(self, cases: int, tell: Callable[[Failure], None]) -> None:
        self._cases = cases
        self._tell = tell
        self._cases_of: dict[str, list[Case]] = {}
        self._counts: Counter[str] = Counter()
        self._failures: list[Failure] = []
        self.digests: dict[int, str] = {}
        self.answers: dict[str, tuple[Answer, ...]] = {}

    @property
    def failures(self) -> tuple[Failure, ...]:
        """All so far, in the order of the cases."""
        return tuple(sorted(self._failures, key=lambda failure: failure.number))

    def progress(self, under_way: int, seconds: float) -> SweepProgress:
        """How far the sweep is."""
        counts = self._counts
        return SweepProgress(
            self._cases, counts[THERE], counts[COMPUTED], counts[FAILED], under_way, seconds
        )

    def joins(self, case: Case, digest: str) -> None:
        """A case will be answered by the run with this digest."""
        self.digests[case.number] = digest
        self._cases_of.setdefault(digest, []).append(case)

    def answered(self, digest: str, answers: Sequence[Answer], what: str) -> None:
        """The run has answered its questions."""
        self.answers[digest] = tuple(answers)
        self._settle(digest, _Fate(what))

    def failed(self, digest: str, reason: str, before: bool = False) -> None:
        """The run came to nothing."""
        self._settle(digest, _Fate(FAILED, reason, before))

    def refused(self, case: Case, reason: str) -> None:
        """The case is no scenario that could be run."""
        self._count(case, _Fate(FAILED, reason))

    def _settle(self, digest: str, fate: _Fate) -> None:
        for case in self._cases_of[digest]:
            self._count(case, fate)

    def _count(self, case: Case, fate: _Fate) -> None:
        self._counts[fate.what] += 1
        if fate.what == FAILED:
            failure = Failure(case.number, tuple(case.settings), fate.reason, fate.before)
            self._failures.append(failure)
            self._tell(failure)
