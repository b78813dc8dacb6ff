"""A scenario's own beginning, carried out and timed: its steps, and what one record costs.

The same loop, ledger and writer are used as in a run, on the charges of the scenario. The first
call of everything, which may compile, is not timed.
"""

from __future__ import annotations

import math
import tempfile
import time as clocks
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from itertools import pairwise
from pathlib import Path
from typing import Any

import numpy as np

from driftwell.assembly import Assembly
from driftwell.coulomb.form import Coulomb
from driftwell.errors import RecordError, StepError
from driftwell.ledger.ledger import Ledger
from driftwell.particles.state import Particles
from driftwell.record.index import segment_name
from driftwell.record.resume_state import particles_state
from driftwell.record.rows import ledger_row, moment_rows, track_rows
from driftwell.record.writer import RunWriter
from driftwell.scenario.read import LoadedScenario
from driftwell.stepping.loop import TimeLoop
from driftwell.stepping.schedule import RECORD, SNAPSHOT

_PARTS = 20
"""Parts into which timed steps are cut, to see how much their time varies."""
_SEGMENT_BYTES = 2_000_000
"""Bytes of the rows in the segment that shows what a byte costs, beside one with hardly any."""


@dataclass(frozen=True, slots=True)
class Stretch:
    """Steps that were timed.

    steps, seconds : how many, and s they took
    fastest, slowest : s a step, in the best and the worst of some equal parts of them, without the
        tenth that is quicker, and the tenth that is slower
    alive, left : charges before and after them
    """

    steps: int
    seconds: float
    fastest: float
    slowest: float
    alive: int
    left: int

    @property
    def step(self) -> float:
        """s a step, on the average."""
        return self.seconds / self.steps


@dataclass(frozen=True, slots=True)
class RecordCost:
    """What a record costs, s.

    record : closing the ledger and keeping what there is at one time
    segment : sealing a segment with nothing but the state in it
    byte : each further byte of a segment
    """

    record: float
    segment: float
    byte: float


def timed_steps(loop: TimeLoop, seconds: float) -> Stretch:
    """Go on with a run's steps for about so many seconds, or to its end, or until all are lost.

    The very first step, in which memory is laid out, counts only where there is no other.

    Raises StepError where the motion cannot be continued.
    """
    alive = loop.alive
    marks = np.flatnonzero(loop.schedule.flags & (RECORD | SNAPSHOT))
    began = clocks.perf_counter()
    loop.to_mark(int(marks[-1]), _once())
    first = loop.steps_done, clocks.perf_counter() - began
    loop.remove_lost()
    taken: list[tuple[int, float]] = []
    began = clocks.perf_counter()
    for mark in () if loop.over else marks[marks > loop.mark]:
        before = [(loop.steps_done, clocks.perf_counter())]

        def keep_going(before: list[tuple[int, float]] = before) -> bool:
            before.append((loop.steps_done, clocks.perf_counter()))
            return before[-1][1] - began < seconds

        going = loop.to_mark(int(mark), keep_going)
        before.append((loop.steps_done, clocks.perf_counter()))
        taken += [(last[0] - first[0], last[1] - first[1]) for first, last in pairwise(before)]
        loop.take_events()
        loop.take_births()
        loop.take_samples()
        loop.remove_lost()
        if not going or loop.over:
            break
    if not any(count for count, _ in taken):
        taken = [first]
    steps = sum(count for count, _ in taken)
    whole = math.fsum(time for _, time in taken)
    paces = sorted(_paces(taken, whole / _PARTS))
    tenth = len(paces) // 10
    return Stretch(steps, whole, paces[tenth], paces[-1 - tenth], alive, loop.alive)


def _paces(taken: list[tuple[int, float]], least: float) -> list[float]:
    """Seconds a step in parts of the stretch of at least `least` s each; one part at least."""
    paces = []
    steps, time = 0, 0.0
    for count, spent in taken:
        steps, time = steps + count, time + spent
        if steps and time >= least:
            paces.append(time / steps)
            steps, time = 0, 0.0
    return paces or [time / steps]


def without_coulomb(parts: Assembly, threads: int, seconds: float) -> float | None:
    """s a step where the charges do not feel each other; None where such a run fails."""
    scenario = parts.scenario.model_copy(update={"coulomb": Coulomb(method="off")})
    return _pace(replace(parts, scenario=scenario), threads, seconds)


def with_half(parts: Assembly, threads: int, seconds: float) -> float | None:
    """s a step with every second charge of each cloud, of twice the weight; None if it fails."""
    particles = parts.particles
    first = np.array([cloud.first_id for cloud in parts.clouds])
    half = particles.kept((particles.id - first[particles.cloud]) % 2 == 0)
    half.weight *= 2.0
    return _pace(replace(parts, particles=half), threads, seconds)


def _pace(parts: Assembly, threads: int, seconds: float) -> float | None:
    try:
        loop = replace(parts, particles=copy_of(parts.particles)).time_loop(threads)
        return timed_steps(loop, seconds).step
    except StepError:
        return None


def _once() -> Callable[[], bool]:
    """What lets a loop make one call into the compiled steps, and no more."""
    answers: Iterator[bool] = iter((True,))
    return lambda: next(answers, False)


def copy_of(particles: Particles) -> Particles:
    """The same charges in arrays of their own."""
    return particles.kept(np.ones(len(particles), dtype=np.bool_))


class TimedRecord:
    """What a run does at a record, done as often as wanted in a folder that is given up again."""

    def __init__(self, loaded: LoadedScenario, parts: Assembly, loop: TimeLoop, folder: Path):
        self._parts, self._loop, self._folder = parts, loop, folder
        self._tracked = parts.tracked
        self._ledger = Ledger()
        self._writer = RunWriter.create(
            folder,
            parts.header(loaded, loop.summation, 1, ""),
        )
        self._sealed = 0
        self._bytes = [0]
        loop.keep_accuracy()  # before the first record, as a run does
        self._account()  # what compiles is not timed
        self._rows()
        self._state()

    def cost(self, seconds: float) -> RecordCost:
        """The cost, from as many records as take so many seconds."""
        count, began = 0, clocks.perf_counter()
        while count < 1 or clocks.perf_counter() - began < seconds:
            self._account()
            self._rows()
            self._state()
            count += 1
        record = (clocks.perf_counter() - began) / count
        self._seal()
        self._rows()
        small = min(self._seal() for _ in range(2))
        row = max(self._parts.extent.tracked * 48, 1000)
        for _ in range(max(2, _SEGMENT_BYTES // row)):
            self._rows()
        large = self._seal()
        more = self._bytes[-1] - self._bytes[-2]
        return RecordCost(record, small, max(large - small, 0.0) / max(more, 1))

    def _account(self) -> None:
        loop = self._loop
        self._row = self._ledger.close(
            loop.time, loop.plan, loop.charges, loop.work, loop.summation
        )

    def _rows(self) -> None:
        loop, writer = self._loop, self._writer
        writer.ledger(ledger_row(self._row))
        present = loop.present()
        writer.trajectory(loop.time, track_rows(present, self._tracked))
        writer.moments(loop.time, moment_rows(present, self._parts.clouds))

    def _state(self) -> dict[str, Any]:
        kept = {f"ledger/{name}": item for name, item in self._ledger.state().items()}
        particles = particles_state(copy_of(self._loop.particles))
        return {**particles, **self._loop.state(), **kept}

    def _seal(self) -> float:
        """s that sealing takes what waits."""
        state = self._state()
        began = clocks.perf_counter()
        self._writer.seal(state)
        took = clocks.perf_counter() - began
        self._sealed += 1
        self._bytes.append((self._folder / segment_name(self._sealed)).stat().st_size)
        return took


@contextmanager
def spare_folder() -> Iterator[Path]:
    """A folder for segments that are written to be timed, removed afterwards."""
    try:
        with tempfile.TemporaryDirectory(prefix="driftwell-", ignore_cleanup_errors=True) as name:
            yield Path(name) / "run"
    except (OSError, RecordError) as fault:
        why = getattr(fault.__cause__ or fault, "strerror", None) or fault
        raise RecordError(
            f"No record can be written in the folder for temporary files, to be timed ({why}). "
            "Needs a folder with space that may be written to: name one in the environment "
            "variable TMPDIR."
        ) from fault
