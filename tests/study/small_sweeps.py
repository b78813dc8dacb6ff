"""Small studies without a file, a catalogue in memory, and an observer that keeps what it hears."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, field
from pathlib import Path
from typing import Any

from driftwell.answers.answer import Answer
from driftwell.study.cores import Sharing
from driftwell.study.engine import Done, Task
from driftwell.study.progress import Failure, SweepProgress


@dataclass(frozen=True)
class Point:
    """A case."""

    number: int
    settings: tuple[str, ...]
    values: tuple[float | str, ...] = ()
    replica: int = 0


@dataclass(frozen=True)
class Varied:
    """An axis."""

    name: str
    unit: str = ""


@dataclass(frozen=True)
class Points:
    """A study."""

    scenario_path: Path
    cases: tuple[Point, ...]
    axes: tuple[Varied, ...] = ()
    title: str = "A study"
    text: str = "title = 'A study'\n"


def study_of(path: Path, *settings: Sequence[str]) -> Points:
    """A study whose cases have these settings."""
    return Points(path, tuple(Point(k, tuple(each)) for k, each in enumerate(settings, 1)))


@dataclass
class Entry:
    """A run in the catalogue."""

    digest: str
    numbers: list[int]
    word: str = ""
    sentence: str = ""
    answers: tuple[Answer, ...] = ()
    begun: int = 0


@dataclass
class Memory:
    """A catalogue that lasts as long as the test."""

    entries: dict[str, Entry] = field(default_factory=dict)

    def add_all(self, cases: Iterable[tuple[str, int, Sequence[str]]]) -> None:
        for entry in self.entries.values():
            entry.numbers.clear()
        for digest, number, _ in cases:
            self.entries.setdefault(digest, Entry(digest, [])).numbers.append(number)

    def began(self, digest: str) -> None:
        self.entries[digest].begun += 1
        self.entries[digest].word = "begun"

    def ended(
        self,
        digest: str,
        word: str,
        sentence: str,
        wall_time: float | None,
        answers: Sequence[Answer],
    ) -> None:
        entry = self.entries[digest]
        entry.word, entry.sentence, entry.answers = word, sentence, tuple(answers)

    def rows(self) -> list[Entry]:
        return [entry for entry in self.entries.values() for _ in entry.numbers]


class Heard:
    """An observer; `goes` is asked whether to go on."""

    def __init__(self, goes: Callable[[SweepProgress], bool] = lambda _: True) -> None:
        self.goes = goes
        self.sharing: list[Sharing] = []
        self.failures: list[Failure] = []
        self.progress: list[SweepProgress] = []

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        self.sharing.append(sharing)

    def told(self, sentence: str) -> None:
        """Nothing is kept."""

    def failed(self, failure: Failure) -> None:
        self.failures.append(failure)

    def goes_on(self, progress: SweepProgress) -> bool:
        self.progress.append(progress)
        return self.goes(progress)


class Scripted:
    """An engine in this process: each task is answered by `reply`, which may also be a reason.

    asked : the contents of all tasks, in their order
    """

    def __init__(self, reply: Callable[[Task], dict[str, Any] | str], workers: int = 2) -> None:
        self._reply = reply
        self._workers = workers
        self._waiting: list[Task] = []
        self.asked: list[dict[str, Any]] = []
        self.stopped = self.closed = False

    def of(self, workers: int, threads: int) -> Scripted:
        """As a factory of engines."""
        self._workers = workers
        return self

    def room(self) -> int:
        return self._workers - len(self._waiting)

    def submit(self, task: Task) -> None:
        assert not self.stopped
        self.asked.append(dict(task.content))
        self._waiting.append(task)

    def next(self, timeout: float) -> Done | None:
        if not self._waiting:
            return None
        task = self._waiting.pop(0)
        said = self._reply(task)
        return Done(task.key, None, said) if isinstance(said, str) else Done(task.key, said)

    def under_way(self) -> int:
        return min(self._workers, len(self._waiting))

    def stop(self) -> None:
        self.stopped = True

    def close(self) -> None:
        self.closed = True


def ended(word: str, sentence: str = "", value: float = 1.0) -> dict[str, Any]:
    """A worker's reply."""
    answer = Answer("held", "fraction-left", value, "", 0.1, "")
    return {
        "word": word,
        "sentence": sentence,
        "wall_time": 0.5,
        "seconds": 0.6,
        "answers": [{name: getattr(answer, name) for name in Answer.__slots__}],
    }
