"""What a sweep needs of a study and of a catalogue of runs."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from pathlib import Path
from typing import Protocol

from driftwell.answers.answer import Answer


class Case(Protocol):
    """One point of a study."""

    @property
    def number(self) -> int:
        """Its place in the study."""

    @property
    def settings(self) -> tuple[str, ...]:
        """``key=value``, put into the scenario."""

    @property
    def values(self) -> tuple[float | str, ...]:
        """What is varied, in the order of the axes."""


class Axis(Protocol):
    """What is varied."""

    @property
    def name(self) -> str:
        """The key of the scenario."""

    @property
    def unit(self) -> str:
        """Of its values; "1" where they are plain numbers, empty where they are texts."""


class Study(Protocol):
    """A scenario and the points it is to be computed at."""

    @property
    def title(self) -> str:
        """What it is for, in one line."""

    @property
    def text(self) -> str:
        """The study's file."""

    @property
    def scenario_path(self) -> Path:
        """The scenario that is varied."""

    @property
    def cases(self) -> Sequence[Case]:
        """All points."""

    @property
    def axes(self) -> Sequence[Axis]:
        """What is varied."""


class Row(Protocol):
    """What a catalogue knows of the run of a case."""

    @property
    def digest(self) -> str:
        """Of the run's content."""

    @property
    def word(self) -> str:
        """How it ended."""

    @property
    def sentence(self) -> str:
        """The same in a sentence."""

    @property
    def answers(self) -> Sequence[Answer]:
        """What it says."""


class Catalogue(Protocol):
    """What is kept of the runs of a sweep."""

    def add_all(self, cases: Iterable[tuple[str, int, Sequence[str]]]) -> None:
        """All cases of the study: digest of the run that answers it, number, settings."""

    def began(self, digest: str) -> None:
        """The run is given to a worker."""

    def ended(
        self,
        digest: str,
        word: str,
        sentence: str,
        wall_time: float | None,
        answers: Sequence[Answer],
    ) -> None:
        """How the run ended."""

    def rows(self) -> Sequence[Row]:
        """All cases with their runs."""
