"""The engine of a sweep on a cluster: one task of the cluster is one try of a run.

A result is let go of as soon as it is here: as long as a cluster keeps one, it is lost with the
worker that holds it, and computed anew. A worker may die at any time. The cluster gives its tasks
to others by itself, now and then twice, which harms nothing: a run's folder belongs to one process
at a time, and whoever comes later goes on with what is there, or tells what it found finished.
Where the cluster gives a task up, it is given again here, under another name.
"""

from __future__ import annotations

import time
from collections import deque
from collections.abc import Callable, Mapping
from contextlib import suppress
from dataclasses import dataclass
from itertools import count
from pathlib import Path
from queue import Empty, SimpleQueue
from typing import Any, TypeVar
from uuid import uuid4

from driftwell._version import __version__
from driftwell.exit_codes import SCHEDULER_GONE
from driftwell.run import STOPPED
from driftwell.study.cluster_task import computed, leave, stop
from driftwell.study.engine import Done, EngineError, Task

T = TypeVar("T")

TRIES = 20
"""How often a run is given to a cluster that loses it, or stops it."""
_AHEAD = 2
"""Runs for each of the cluster's threads, at most; those beyond one wait there."""
_LOOK = 1.0
"""s, between two looks at what the cluster has."""
_FETCH = 5.0
"""s, for a result to come; its worker may be gone, and it is then computed anew."""
_BUSY_PAUSE, _BUSY_PATIENCE = 30.0, 3600.0
"""s, until a run is given again whose folder another process holds, and how long that is done."""
_PATHS = ("scenario", "folder")


class ClusterLostError(EngineError):
    """The scheduler is gone, and with it all it knew."""

    exit_code = SCHEDULER_GONE


@dataclass(slots=True)
class _Given:
    """A task that the cluster has.

    name : of this try; tries : times it was given, without those that found it busy
    busy : when its folder was first found in use; not_before : when it is given again
    """

    task: Task
    content: Mapping[str, Any]
    future: Any = None
    name: str = ""
    tries: int = 0
    busy: float | None = None
    not_before: float | None = None


class ClusterEngine:
    """An :class:`driftwell.study.engine.Engine` of all workers that a scheduler has.

    client : connected to it; closed with the engine
    most : runs at a time; None where all its threads may be used
    tries : how often a run is given to the cluster
    """

    def __init__(self, client: Any, address: str, most: int | None, tries: int = TRIES) -> None:
        self._client = client
        self._address = address
        self._most = most
        self._most_tries = tries
        self._sweep = uuid4().hex[:8]
        self._number = count(1)
        self._given: dict[str, _Given] = {}
        self._keys: dict[str, str] = {}
        self._ended: SimpleQueue[str] = SimpleQueue()
        self._done: deque[Done] = deque()
        self._threads = 0
        self._looked = float("-inf")
        self._stopping = False
        self._closed = False

    def room(self) -> int:
        """How many more tasks it should be given now, so that no worker waits."""
        self._look()
        return max(0, max(1, _AHEAD * self._threads) - len(self._given))

    def under_way(self) -> int:
        """Tasks that were begun and not handed over yet."""
        if self._stopping:
            return len(self._given) + len(self._done)
        return len(self._done) + min(len(self._given), self._threads)

    def submit(self, task: Task) -> None:
        """Take a task; it is begun as soon as a worker is free."""
        if self._stopping:
            raise ValueError("an engine that was stopped takes no tasks")
        paths = {name: str(Path(task.content[name]).absolute()) for name in _PATHS}
        given = _Given(task, {**task.content, **paths})
        self._given[task.key] = given
        self._give(given)

    def next(self, timeout: float) -> Done | None:
        """The next task that is done, waited for at most `timeout` s.

        Raises
        ------
        ClusterLostError
            The scheduler does not answer any more.
        EngineError
            A worker cannot compute anything.
        """
        end = time.monotonic() + timeout
        while not self._done:
            self._look()
            left = end - time.monotonic()
            try:
                name = self._ended.get(timeout=max(0.0, min(left, _LOOK)))
            except Empty:
                if left <= 0.0:
                    break
                continue
            key = self._keys.pop(name, None)
            if key is not None:
                self._take(self._given[key])
        return self._done.popleft() if self._done else None

    def stop(self) -> None:
        """Ask all runs to end in order; those that were not begun answer at once."""
        if not self._stopping:
            self._stopping = True
            self._looked = float("-inf")
            self._look()

    def close(self) -> None:
        """End the connection; what is still under way is sealed by the workers."""
        if self._closed:
            return
        self._closed = True
        with suppress(Exception):  # whatever is lost now, nobody waits for
            if self._client.status == "running":
                self._client.run(leave, self._sweep, on_error="ignore")
        for given in self._given.values():
            self._release(given)
        with suppress(Exception):
            self._client.close(timeout=_FETCH)

    def _look(self) -> None:
        """See now and then what the cluster has, and do what waits for its time."""
        now = time.monotonic()
        self._asked(lambda: None)
        if now - self._looked < _LOOK:
            return
        threads = sum(self._asked(self._client.nthreads).values())
        self._threads = threads if self._most is None else min(threads, self._most)
        self._looked = time.monotonic()
        waiting = [given for given in self._given.values() if given.not_before is not None]
        if self._stopping:
            if threads:  # again and again: workers may have come since
                self._asked(lambda: self._client.run(stop, self._sweep, on_error="ignore"))
            for given in waiting if threads else list(self._given.values()):
                self._finish(given, None, "No worker had it when the sweep was stopped.")
            return
        for given in waiting:
            if given.not_before is not None and now >= given.not_before:
                self._give(given)

    def _asked(self, question: Callable[[], T]) -> T:
        """What the cluster says to a question.

        Raises ClusterLostError where the scheduler is gone.
        """
        try:
            if self._client.status == "running":
                return question()
        except OSError as fault:
            raise self._lost() from fault
        except Exception as fault:
            if self._client.status == "running":
                raise
            raise self._lost() from fault
        raise self._lost()

    def _lost(self) -> ClusterLostError:
        return ClusterLostError(
            f"{self._address}: the scheduler is gone, or the way to it. Nothing that was finished "
            "or sealed is lost: start the scheduler and its workers again, and give the same "
            "command, with the scheduler's address."
        )

    def _give(self, given: _Given) -> None:
        """Let the cluster try it."""
        given.tries += 1
        given.not_before = None
        given.name = f"run-{given.task.key[:32]}-{self._sweep}-{next(self._number)}"
        given.future = self._asked(
            lambda: self._client.submit(
                computed,
                self._sweep,
                given.name,
                given.content,
                __version__,
                key=given.name,
                pure=False,
            )
        )
        self._watch(given)

    def _watch(self, given: _Given) -> None:
        name = given.name
        self._keys[name] = given.task.key
        given.future.add_done_callback(lambda _: self._ended.put(name))

    def _take(self, given: _Given) -> None:
        """A try has come to its end: take the result, or let it be tried again."""
        future = given.future
        if future.status in {"cancelled", "lost"}:  # by nobody here
            raise self._lost()
        try:
            reply, reason = future.result(timeout=_FETCH)
        except TimeoutError:
            self._watch(given)
            return
        except EngineError:
            raise
        except ImportError as fault:
            raise EngineError(
                f"A worker of {self._address} cannot load driftwell ({fault}); every worker needs "
                f"driftwell {__version__} in its own Python."
            ) from fault
        except Exception as fault:
            self._asked(lambda: None)
            self._again(given, f"{type(fault).__name__}: {str(fault).splitlines()[0]}")
            return
        self._release(given)
        if reply is not None and reply["busy"]:
            self._later(given, reply)
        elif reply is not None and reply["word"] == STOPPED and not self._stopping:
            given.content = {**given.content, "fresh": False}
            if given.tries < self._most_tries:
                self._give(given)
            else:
                self._finish(given, reply)
        else:
            self._finish(given, reply, reason)

    def _later(self, given: _Given, reply: Mapping[str, Any]) -> None:
        """A worker that was given up but lives may hold the run's folder: give it time to end."""
        now = time.monotonic()
        given.busy = given.busy or now
        if self._stopping or now - given.busy >= _BUSY_PATIENCE:
            self._finish(given, reply)
        else:
            given.tries -= 1
            given.not_before = now + _BUSY_PAUSE

    def _again(self, given: _Given, fault: str) -> None:
        """The cluster has given it up."""
        self._release(given)
        if not self._stopping and given.tries < self._most_tries:
            self._give(given)
            return
        often = f"{given.tries} time{'s' * (given.tries != 1)}"
        self._finish(given, None, f"The cluster gave it up {often}; the last time: {fault}")

    def _finish(self, given: _Given, reply: Mapping[str, Any] | None, reason: str = "") -> None:
        """Hand it over, once."""
        self._release(given)
        self._keys.pop(given.name, None)
        del self._given[given.task.key]
        self._done.append(Done(given.task.key, reply, reason))

    def _release(self, given: _Given) -> None:
        """Let the cluster forget it."""
        if given.future is not None:
            with suppress(Exception):
                given.future.release()
            given.future = None
