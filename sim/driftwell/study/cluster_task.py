"""What a worker of a cluster does for a sweep.

Each run is computed in a process of its own below the worker (:mod:`driftwell.study.pool`), which
lives as long as there are runs for it. So the worker's own process is never held up by compiled
code nor ended by its crash, has as many runs side by side as it has threads, and a run whose worker
is killed is sealed by the process that computes it. Nobody but a cluster's worker runs this.
"""

from __future__ import annotations

import platform
import threading
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Any

from driftwell._version import __version__
from driftwell.run import EXIT_CODES, STOPPED
from driftwell.study.engine import Done, EngineError, Task
from driftwell.study.pool import Pool
from driftwell.study.worker import ended_so

_PAUSE = 0.5
"""s, between two looks whether the run is still wanted."""

_guard = threading.Lock()
_idle: list[tuple[int, Pool]] = []
"""Processes without a task, and the threads they may use."""
_stopped: set[str] = set()
"""Sweeps that were asked to stop."""


def fitness(version: str, folder: str) -> str:
    """Why this worker cannot compute a sweep of that version in that folder; empty where it can."""
    if version != __version__:
        return (
            f"{platform.node()}: has driftwell {__version__}; the sweep needs {version} on all "
            "machines."
        )
    if not Path(folder).is_dir():
        return (
            f"{folder}: is not there on {platform.node()}; the sweep's folder needs to be on a "
            "disk that all machines see under the same name."
        )
    return ""


def computed(
    sweep: str, name: str, content: Mapping[str, Any], version: str
) -> tuple[Mapping[str, Any] | None, str]:
    """Execute a run; the reply, or None and the reason why there is none.

    Raises EngineError where this worker cannot compute anything.

    name : of the task in the cluster
    """
    unfit = fitness(version, str(Path(content["folder"]).parent))
    if unfit:
        raise EngineError(unfit)
    stopped = ended_so(STOPPED, "Asked to stop before the first step.", EXIT_CODES[STOPPED])
    if sweep in _stopped:
        return stopped, ""
    threads = int(content["threads"])
    pool = _free(threads)
    whole = False
    try:
        done = _done(pool, Task(name, content), _wanted(sweep, name))
        whole = done is not None and done.reply is not None and sweep not in _stopped
    except EngineError as fault:
        raise EngineError(f"{platform.node()}: {fault}") from fault
    finally:
        if whole:
            with _guard:
                _idle.append((threads, pool))
        else:
            pool.close()
    if done is None:
        return stopped, ""
    return done.reply, f"{platform.node()}: {done.reason}" if done.reason else ""


def stop(sweep: str) -> None:
    """Ask all runs of a sweep on this worker to end in order; those that come later do nothing."""
    _stopped.add(sweep)


def leave(sweep: str) -> None:
    """The sweep is over: end the processes that wait."""
    stop(sweep)
    with _guard:
        left, _idle[:] = list(_idle), []
    for _, pool in left:
        pool.close()


def _free(threads: int) -> Pool:
    """A process that may use so many threads, or will be started for it."""
    with _guard:
        for k, (each, pool) in enumerate(_idle):
            if each == threads:
                del _idle[k]
                return pool
    return Pool.of_runs(1, threads)


def _done(pool: Pool, task: Task, wanted: Callable[[], bool]) -> Done | None:
    """What became of the task; None where it was never begun, because nobody wanted it."""
    pool.submit(task)
    asked = False
    while (done := pool.next(_PAUSE)) is None:
        if asked and not pool.under_way():
            return None
        if not asked and not wanted():
            asked = True
            pool.stop()
    return done


def _wanted(sweep: str, name: str) -> Callable[[], bool]:
    """Tells whether anybody still waits for this task: its driver may have been killed."""
    from distributed import get_worker

    worker = get_worker()

    def asked() -> bool:
        known = worker.state.tasks.get(name)
        return sweep not in _stopped and known is not None and known.state != "cancelled"

    return asked
