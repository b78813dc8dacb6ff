"""Worker processes of this machine that live as long as a sweep: the engine that needs no other.

Processes are spawned, never forked: threads of compiled code hang after a fork. A worker that dies
is replaced and its task given again, a few times; what else it did is not lost, since each result
is handed over when it comes. A worker's death never harms another's task.
"""

from __future__ import annotations

import os
import selectors
import sys
import time
from collections import deque
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any, Self

from driftwell.study.child import Child
from driftwell.study.engine import Done, EngineError, Task

TRIES = 3
"""How often a task is begun whose worker dies."""
STILLBORN = 3
"""Workers in a row that die before they can take a task, until no more are started."""
GRACE = 10.0
"""s, from the request to end until a worker is killed."""
_AHEAD = 2
"""Tasks that wait for each worker, at most."""
_SHOWN = 80
"""Characters of a spoilt answer that are told."""
_LIMITS = ("NUMBA_NUM_THREADS", "OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "MKL_NUM_THREADS")
"""What libraries read to know how many threads they may start."""


def worker_command() -> list[str]:
    """The command of a worker, without the numbers of its pipes.

    The current folder is kept out of the search for modules: a user's random.py must harm nobody.
    """
    return [sys.executable, "-P", "-m", "driftwell.study.worker"]


def worker_environment(threads: int) -> dict[str, str]:
    """The environment of a worker that may use so many threads and imports this very package."""
    found = {**os.environ, **dict.fromkeys(_LIMITS, str(threads))}
    root = Path(__file__).resolve().parents[2]
    if root.name not in {"site-packages", "dist-packages"}:
        others = [found["PYTHONPATH"]] if found.get("PYTHONPATH") else []
        found["PYTHONPATH"] = os.pathsep.join([str(root), *others])
    return found


class Pool:
    """An :class:`driftwell.study.engine.Engine` of `workers` processes; a context manager.

    command, environment : what each is started with; two numbers of pipes are put behind
    tries : how often a task is begun whose worker dies
    grace : s, from the request to end until a worker is killed
    """

    def __init__(
        self,
        workers: int,
        command: Sequence[str],
        environment: Mapping[str, str],
        tries: int = TRIES,
        grace: float = GRACE,
    ) -> None:
        self._size = workers
        self._command = tuple(command)
        self._environment = dict(environment)
        self._most_tries = tries
        self._grace = grace
        self._children: list[Child] = []
        self._selector = selectors.DefaultSelector()
        self._waiting: deque[Task] = deque()
        self._done: deque[Done] = deque()
        self._tries: dict[str, int] = {}
        self._stillborn = 0
        self._stopping = False

    @classmethod
    def of_runs(cls, workers: int, threads: int) -> Self:
        """Workers that execute scenarios, on so many threads each."""
        return cls(workers, worker_command(), worker_environment(threads))

    def __enter__(self) -> Self:
        return self

    def __exit__(self, *_: object) -> None:
        self.close()

    @property
    def pids(self) -> list[int]:
        """Numbers of the processes that live."""
        return [child.pid for child in self._children]

    def room(self) -> int:
        """How many more tasks it should be given now, so that no worker waits."""
        return max(0, _AHEAD * self._size - len(self._waiting))

    def under_way(self) -> int:
        """Tasks that were begun and not handed over yet."""
        return len(self._done) + sum(child.task is not None for child in self._children)

    def submit(self, task: Task) -> None:
        """Take a task; it is begun as soon as a worker is free."""
        if self._stopping:
            raise ValueError("an engine that was stopped takes no tasks")
        self._waiting.append(task)
        self._feed()

    def next(self, timeout: float) -> Done | None:
        """The next task that is done, waited for at most `timeout` s.

        Raises EngineError where workers die before they can take a task.
        """
        end = time.monotonic() + timeout
        while not self._done:
            self._feed()
            ready = self._selector.select(max(0.0, end - time.monotonic()))
            for key, _ in ready:
                self._hear(key.data)
            if not ready and time.monotonic() >= end:
                break
        self._feed()  # before anybody looks at the result: no worker waits for that
        return self._done.popleft() if self._done else None

    def stop(self) -> None:
        """Forget the tasks that were not begun, and ask those under way to end in order."""
        self._stopping = True
        self._waiting.clear()
        for child in self._children:
            child.no_more()
            child.ask_to_end()

    def close(self) -> None:
        """End all workers; those that do not heed the request within the grace are killed."""
        self.stop()
        end = time.monotonic() + self._grace
        while self._children:
            self._forget(self._children[-1]).buried(end)
        self._selector.close()

    def kill(self) -> None:
        """End all workers there and then; any thread may call it."""
        for child in tuple(self._children):
            child.kill()

    def _feed(self) -> None:
        """Give tasks to whoever is free, and start who is missing."""
        if self._stopping:
            return
        for child in self._children:
            if not self._waiting:
                return
            if child.ready and child.task is None:
                task = self._waiting.popleft()
                self._tries[task.key] = self._tries.get(task.key, 0) + 1
                child.give(task)
        coming = sum(not child.ready for child in self._children)
        for _ in range(min(self._size - len(self._children), len(self._waiting) - coming)):
            self._start()

    def _start(self) -> None:
        try:
            child = Child(self._command, self._environment)
        except OSError as fault:
            raise EngineError(
                f"A worker process cannot be started ({fault.strerror}). Name fewer with --workers."
            ) from fault
        self._children.append(child)
        self._selector.register(child, selectors.EVENT_READ, child)

    def _hear(self, child: Child) -> None:
        lines, lives = child.heard()
        for line in lines:
            if not self._taken(child, line):
                child.kill()
                self._lost(child, f"answered with what is no answer: {_excerpt(line)}")
                return
        if not lives:
            self._lost(child, "")

    def _taken(self, child: Child, line: Any) -> bool:
        """Take what a worker says for what it is; False where it is nothing."""
        if not isinstance(line, dict):
            return False
        if not child.ready:
            child.ready = line.get("ready") is True
            self._stillborn = 0
            return child.ready
        if child.task is None or line.get("key") != child.task.key:
            return False
        self._done.append(Done(child.task.key, line))
        self._tries.pop(child.task.key, None)
        child.task = None
        return True

    def _lost(self, child: Child, fault: str) -> None:
        """A worker is gone: its task is given again, or done with."""
        task, was_ready = child.task, child.ready
        ending = self._forget(child).buried()
        if task is not None:
            self._give_again(task, fault or ending)
        if not was_ready and not self._stopping:
            self._stillborn += 1
            if self._stillborn >= STILLBORN:
                raise EngineError(
                    f"{STILLBORN} worker processes in a row were gone before they could work; the "
                    f"last one {fault or ending}."
                )

    def _give_again(self, task: Task, ending: str) -> None:
        tries = self._tries[task.key]
        if not self._stopping and tries < self._most_tries:
            self._waiting.appendleft(task)
            return
        del self._tries[task.key]
        often = f" {tries} times; the last time it" if tries > 1 else ": it"
        self._done.append(
            Done(task.key, None, f"The process that computed it was lost{often} {ending}.")
        )

    def _forget(self, child: Child) -> Child:
        self._children.remove(child)
        self._selector.unregister(child)
        return child


def _excerpt(line: Any) -> str:
    text = repr(line)
    return text if len(text) <= _SHOWN else text[:_SHOWN] + " ..."
