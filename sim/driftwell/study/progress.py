"""How far a sweep is, and what it came to."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Protocol

from driftwell.answers.answer import Answer
from driftwell.study.cores import Sharing


@dataclass(frozen=True, slots=True)
class Failure:
    """A case without answers.

    number : of the case in the study; settings : what was varied, as ``key=value``
    reason : why, in words
    before : whether it failed in an earlier sweep and was not tried again
    """

    number: int
    settings: tuple[str, ...]
    reason: str
    before: bool = False


@dataclass(frozen=True, slots=True)
class SweepProgress:
    """How far a sweep is; all but the last two are numbers of cases.

    there : answered before; computed : answered now; failed : also those of an earlier sweep
    under_way : runs being computed
    seconds : by the clock, since the first run was begun; 0 before
    """

    cases: int
    there: int
    computed: int
    failed: int
    under_way: int
    seconds: float

    @property
    def left(self) -> int:
        """Cases nothing is known of yet."""
        return self.cases - self.there - self.computed - self.failed


class SweepObserver(Protocol):
    """Who watches a sweep."""

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        """There is something to compute, and it is settled how."""

    def told(self, sentence: str) -> None:
        """What a user should know of the sweep."""

    def failed(self, failure: Failure) -> None:
        """A case came to nothing; the others go on."""

    def goes_on(self, progress: SweepProgress) -> bool:
        """Called several times a second; False asks the runs to stop."""


@dataclass(frozen=True, slots=True)
class SweepResult:
    """What a sweep came to.

    progress : as it was at its end
    failures : in the order of the cases
    digests : of the runs, by the numbers of their cases; none where the case is no scenario
    answers : of the runs that have any, by their digests
    stopped : whether it was asked to stop before its end
    sharing : how the cores were shared; None where nothing was to be computed
    busy : s, that the runs took in their workers in all
    """

    folder: Path
    progress: SweepProgress
    failures: tuple[Failure, ...]
    digests: Mapping[int, str]
    answers: Mapping[str, tuple[Answer, ...]]
    stopped: bool
    sharing: Sharing | None
    busy: float
