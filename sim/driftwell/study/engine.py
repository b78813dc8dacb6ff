"""What carries out the runs of a sweep: tasks go in, results come out in any order.

Worker processes of this machine (:mod:`driftwell.study.pool`) are one engine.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Protocol

from driftwell.errors import DriftwellError


class EngineError(DriftwellError):
    """Nothing can be carried out at all: no worker starts."""


@dataclass(frozen=True, slots=True)
class Task:
    """One thing to do.

    key : names it among all tasks of the engine
    content : what the worker is told, fit for JSON
    """

    key: str
    content: Mapping[str, Any]


@dataclass(frozen=True, slots=True)
class Done:
    """What became of a task.

    reply : what the worker answered; None where it never did
    reason : why it never did, in words
    """

    key: str
    reply: Mapping[str, Any] | None
    reason: str = ""


class Engine(Protocol):
    """Carries out tasks, several at a time. Only one thread may call it."""

    def room(self) -> int:
        """How many more tasks it should be given now, so that no worker waits."""

    def submit(self, task: Task) -> None:
        """Take a task; it is begun as soon as a worker is free."""

    def next(self, timeout: float) -> Done | None:
        """The next task that is done, waited for at most `timeout` s.

        Raises EngineError where no worker can be started.
        """

    def under_way(self) -> int:
        """Tasks that were begun and not handed over yet."""

    def stop(self) -> None:
        """Forget the tasks that were not begun, and ask those under way to end in order."""

    def close(self) -> None:
        """End all workers; those that do not heed the request are killed."""
