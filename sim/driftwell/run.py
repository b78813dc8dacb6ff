"""One run: a scenario's parts are put together, moved through time, and what happens is kept.

The run itself prints nothing: an :class:`Observer` is told how far it is and may ask it to stop.
"""

from __future__ import annotations

import time as clocks
from contextlib import ExitStack, suppress
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, Protocol

import numpy as np

from driftwell import exit_codes
from driftwell.answers.answer import Answer
from driftwell.answers.answering import answer_all
from driftwell.assembly import Assembly, assembled, remarks
from driftwell.coulomb.promise import Broken, Promise
from driftwell.errors import FullError, ScenarioError, StepError
from driftwell.forms import spelled
from driftwell.kernels.threads import on_threads
from driftwell.ledger.ledger import Ledger, LedgerRow
from driftwell.particles.state import Particles
from driftwell.record.claim import holds_run, refuse_taken
from driftwell.record.commit import remove_parts
from driftwell.record.earlier import clear_unsealed, differences, earlier_run, put_aside
from driftwell.record.heartbeat import Heartbeat
from driftwell.record.lock import held, made_and_held
from driftwell.record.outcome import Outcome
from driftwell.record.reader import Run, open_run
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.record.rows import (
    birth_rows,
    event_rows,
    ledger_row,
    moment_rows,
    row_of,
    track_rows,
)
from driftwell.record.writer import RunWriter
from driftwell.scenario.read import LoadedScenario
from driftwell.scenario.room import refuse_beyond_disk
from driftwell.stepping.loop import entries_below
from driftwell.stepping.schedule import RECORD, SNAPSHOT, Schedule
from driftwell.stepping.step_choice import StepChoice

FINISHED, ALL_LOST, STOPPED, FAILED, FULL = (
    "finished",
    "all lost",
    "stopped",
    "failed",
    "not recorded",
)
_ENDED = {FINISHED, ALL_LOST, FAILED}
"""What is not gone on with: a motion that could not be continued cannot be now."""
_MOVED = ("particles/position", "particles/velocity")
"""What the time loop changes of the particles."""
EXIT_CODES = {
    FINISHED: exit_codes.FINISHED,
    ALL_LOST: exit_codes.ALL_LOST,
    STOPPED: exit_codes.STOPPED,
    FAILED: exit_codes.NOT_CONTINUED,
    FULL: exit_codes.NOT_RECORDED,
}


@dataclass(frozen=True, slots=True)
class Progress:
    """How far a run is.

    time, duration : s; alive, born : simulated charges; steps, all_steps
    energy_residual : relative, at the last record
    """

    time: float
    duration: float
    alive: int
    born: int
    steps: int
    all_steps: int
    energy_residual: float


class Observer(Protocol):
    """Who watches a run."""

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """What will be done is settled; compilation may come next, then the first step."""

    def told(self, sentence: str) -> None:
        """What a user should know: which Coulomb sum and why, how much it errs; too little room."""

    def goes_on(self, progress: Progress) -> bool:
        """Called about twice a second; False asks the run to stop."""


@dataclass(frozen=True, slots=True)
class Result:
    """What a run came to.

    broken : how the Coulomb sum was less accurate than asked; None where it never was
    """

    folder: Path
    outcome: Outcome
    answers: list[Answer]
    ledger: LedgerRow
    broken: Broken | None = None


def run(
    loaded: LoadedScenario,
    folder: Path,
    observer: Observer,
    threads: int = 1,
    *,
    fresh: bool = False,
    stop_after: float | None = None,
    force: bool = False,
) -> Result:
    """Execute a scenario, leaving its record in `folder`, or go on with what was begun there.

    A run that was cut off or stopped is gone on with, to the same last bit as if it had not been;
    one that has ended is answered from its record.

    fresh : put what is there aside, under another name, and start over
    stop_after : s by the clock, after which the run stops by itself, to be gone on with
    force : begin even where memory or disk look too small; the observer is told

    Raises
    ------
    ScenarioError
        The charges cannot be placed as the scenario says, or the run would not fit in memory.
    BusyError
        Another process works in the folder.
    RecordError
        The folder holds the run of another scenario, or cannot be written; the text says what is
        kept.
    """
    text = loaded.text.encode()
    with on_threads(threads) as given, ExitStack() as holding:
        earlier, holds = None, holds_run(folder)
        if holds and fresh:
            observer.told(f"The run that was there is kept as {put_aside(folder)}.")
            holds = False
        if holds:
            holding.enter_context(held(folder))
            earlier = earlier_run(folder, text, loaded.digest)
            if earlier is None:
                clear_unsealed(folder)
            elif earlier.outcome.word in _ENDED:
                observer.told("Not computed again: the record is whole; --fresh does.")
                with suppress(OSError):  # left by a kill in the very last write
                    remove_parts(folder)
                return _told_again(earlier)
        warn = observer.told if force else None
        if earlier is not None:
            parts = assembled(loaded, warn, observer.told)
            execution = _Execution(parts, folder, observer, stop_after)
            execution.go_on(earlier, given)
            return execution.result()
        refuse_taken(folder, text)
        parts = assembled(loaded, warn, observer.told)
        refuse_beyond_disk(parts.extent, folder, warn)
        execution = _Execution(parts, folder, observer, stop_after)
        execution.begin(loaded, given, holding, held_already=holds)
        return execution.result()


def _present_in(state: dict[str, Any]) -> Particles:
    """The charges in a state that are neither lost nor unborn."""
    particles = particles_of(state)
    return particles.kept(state["charges/alive"] == 1)


def _told_again(earlier: Run) -> Result:
    """What a run came to that has ended."""
    watch = Promise(earlier.header.coulomb_accuracy, entries_below("coulomb", earlier.state()))
    return Result(
        earlier.folder,
        earlier.outcome,
        list(earlier.answers),
        row_of(earlier.ledger[-1]),
        watch.broken(earlier.end_time),
    )


class _Execution:
    """A run while it goes on."""

    def __init__(
        self,
        parts: Assembly,
        folder: Path,
        observer: Observer,
        stop_after: float | None,
    ) -> None:
        self._parts = parts
        self._scenario = parts.scenario
        self._folder = folder
        self._observer = observer
        self._clouds = parts.clouds
        self._walls = len(parts.walls)
        self._at_start = len(parts.particles)
        self._choice = parts.choice
        self._schedule = parts.schedule
        self._stop_after = stop_after
        self._stopped = "Asked to stop"
        self._heartbeat = Heartbeat(folder)
        self._row: LedgerRow | None = None
        self._state: dict[str, Any] = {}
        self._state_at = 0.0
        self._flags = 0
        self._seconds = 0.0
        self._began = self._started = clocks.monotonic()
        observer.begins(parts.choice, parts.schedule, parts.everyone)

    def begin(
        self, loaded: LoadedScenario, threads: int, holding: ExitStack, *, held_already: bool
    ) -> None:
        """Before the first record, in a folder that is held from now on."""
        created = datetime.now(UTC).isoformat(timespec="seconds")
        parts = self._parts
        self._tracked = parts.tracked
        self._loop = parts.time_loop(threads)
        self._ledger = Ledger()
        summation = self._loop.summation
        self._observer.told(f"Coulomb sum: {summation.method}; {summation.because}")
        for each in remarks(parts):
            self._observer.told(each)
        if not held_already:
            holding.enter_context(made_and_held(self._folder))
        self._writer = RunWriter.create(
            self._folder, parts.header(loaded, summation, threads, created)
        )
        self._began = clocks.monotonic()

    def go_on(self, earlier: Run, threads: int) -> None:
        """Where an earlier process sealed its last segment."""
        state = earlier.state()
        self._tracked = np.array(earlier.header.tracked, dtype=np.int64)
        self._loop = self._parts.time_loop(threads, particles_of(state), state)
        self._ledger = Ledger.taken_up(entries_below("ledger", state))
        self._row = row_of(earlier.ledger[-1])
        self._flags = int(self._schedule.flags[self._schedule.time == self._row.time][0])
        self._state, self._state_at = state, self._loop.time
        self._seconds = float(state["run/seconds"])
        self._writer = RunWriter.resumed(earlier)
        steps = self._loop.steps_done
        self._observer.told(
            f"Going on with the run begun {earlier.header.created}, from "
            f"t = {spelled(self._loop.time, 's')}, after {steps} step{'s' * (steps != 1)}"
        )
        acting = self._parts.acting
        for sentence in differences(earlier, "" if acting is None else acting.solved.digest):
            self._observer.told(sentence)
        self._began = clocks.monotonic()

    def result(self) -> Result:
        """Go through all marks, then answer."""
        whole = spelled(self._scenario.duration, "s")
        word, sentence = FINISHED, f"The motion was followed to t = {whole}."
        try:
            if self._row is None:  # at time zero
                self._record(0)
            word, sentence = self._moved(word, sentence)
            if word not in {STOPPED, FAILED}:
                self._writer.forget_last()
            elif self._state_at == self._reached and not self._flags & SNAPSHOT:
                # questions about the end are answered for the last record
                self._writer.last(self._reached, _present_in(self._state))
            return self._finished(word, sentence)
        except FullError as fault:
            return self._result(FULL, str(fault), [])

    def _moved(self, word: str, sentence: str) -> tuple[str, str]:
        """Go from record to record; how it ended, which is as given where nothing came between."""
        flags = self._schedule.flags
        ahead = np.flatnonzero(flags & (RECORD | SNAPSHOT))
        try:
            for mark in ahead[ahead > self._loop.mark]:
                if not self._loop.to_mark(int(mark), self._keep_going):
                    self._checkpoint()
                    reached = spelled(self._reached, "s")
                    return STOPPED, (
                        f"{self._stopped}; recorded up to t = {reached}, and the same command "
                        "goes on."
                    )
                gone = self._loop.over
                self._record(int(mark), last=gone)
                if gone:
                    word = ALL_LOST
                    sentence = f"Every charge was lost by t = {spelled(self._reached, 's')}."
                    break
        except StepError as fault:
            word, sentence = FAILED, f"The motion could not be continued {self._of_whom(fault)}"
        self._seal(self._state)
        return word, sentence

    @property
    def _reached(self) -> float:
        """Time of the last record, s."""
        return 0.0 if self._row is None else self._row.time

    def _of_whom(self, fault: StepError) -> str:
        """What went wrong; among several clouds, whose charge it is."""
        for cloud in self._clouds if len(self._clouds) > 1 else ():
            if fault.charge is not None and 0 <= fault.charge - cloud.first_id < cloud.count:
                number = fault.charge - cloud.first_id
                return f'{fault} (Charge {fault.charge} is number {number} of "{cloud.name}".)'
        return str(fault)

    def _keep_going(self) -> bool:
        """Between two calls of the compiled loop, about twice a second."""
        if self._writer.due(self._state_bytes):
            self._checkpoint()
        if self._stop_after is not None and clocks.monotonic() - self._started > self._stop_after:
            self._stopped = "The time allowed was over"
            return False
        progress = self._progress()
        self._heartbeat.beats(progress)
        return self._observer.goes_on(progress)

    def _progress(self) -> Progress:
        loop = self._loop
        return Progress(
            time=loop.time,
            duration=self._scenario.duration,
            alive=loop.alive,
            born=self._at_start + loop.born,
            steps=loop.steps_done,
            all_steps=self._schedule.total_steps,
            energy_residual=0.0 if self._row is None else self._row.energy_residual,
        )

    def _record(self, mark: int, last: bool = False) -> None:
        """Keep what there is at a mark of the schedule."""
        loop, writer = self._loop, self._writer
        time = float(self._schedule.time[mark])
        self._flags = flags = int(self._schedule.flags[mark])
        error, told = loop.keep_accuracy()
        for sentence in told:
            self._observer.told(sentence)
        self._row = self._ledger.close(
            time, loop.plan, loop.charges, loop.work, loop.summation, error
        )
        writer.ledger(ledger_row(self._row), loop.exchanged)
        self._keep_events()
        loop.remove_lost()
        present = loop.present()
        if flags & RECORD or last:
            writer.trajectory(time, track_rows(present, self._tracked))
            writer.moments(time, moment_rows(present, self._clouds))
        if flags & SNAPSHOT or last:
            writer.snapshot(time, present)
        writer.forget_last()
        self._keep_state()
        if writer.due(self._state_bytes):
            self._seal(self._state)

    def _keep_events(self) -> None:
        """Record what happened on surfaces, and the samples taken, since the last time."""
        for events in self._loop.take_events():
            losses, crossings = event_rows(events, self._walls, len(self._scenario.detector))
            self._writer.losses(losses)
            self._writer.crossings(crossings)
        for born in self._loop.take_births():
            self._writer.births(birth_rows(born))
        for times, values in self._loop.take_samples():
            self._writer.trace(times, values)

    def _checkpoint(self) -> None:
        """Seal what there is between two records, so that a kill costs minutes, not a record."""
        self._keep_events()
        self._seal({**particles_state(self._loop.particles), **self._other_state()})

    def _seal(self, state: dict[str, Any]) -> None:
        self._writer.seal({**state, "run/seconds": np.float64(self._seconds_so_far())})

    def _seconds_so_far(self) -> float:
        """s by the clock, of all processes that worked at the run."""
        return self._seconds + clocks.monotonic() - self._began

    @property
    def _state_bytes(self) -> int:
        """Bytes of a state, about."""
        return sum(each.nbytes for each in self._state.values())

    def _other_state(self) -> dict[str, Any]:
        """All of the state but the particles."""
        kept = {f"ledger/{name}": item for name, item in self._ledger.state().items()}
        return {**self._loop.state(), **kept}

    def _keep_state(self) -> None:
        """Keep the state as it is now; the loop changes places and velocities only, in their place.

        The copies go where those of the record before are, as long as no charge was lost.
        """
        before, loop = self._state, self._loop
        state: dict[str, Any] = dict(particles_state(loop.particles))
        for name in _MOVED:
            old = before.get(name)
            if old is not None and old.shape == state[name].shape:
                old[...] = state[name]
                state[name] = old
            else:
                state[name] = state[name].copy()
        self._state, self._state_at = {**state, **self._other_state()}, self._reached

    def _finished(self, word: str, sentence: str) -> Result:
        answers = answer_all(self._scenario.question, open_run(self._folder))
        result = self._result(word, sentence, answers)
        self._writer.finish(result.outcome, answers)
        return result

    def _result(self, word: str, sentence: str, answers: list[Answer]) -> Result:
        outcome = Outcome(
            word=word,
            sentence=sentence,
            exit_code=EXIT_CODES[word],
            wall_time=self._seconds_so_far(),
            steps=self._loop.steps_done,
        )
        self._heartbeat.ends(self._progress(), word, sentence)
        if self._row is None:
            raise ScenarioError("the run kept no record")
        return Result(
            self._folder, outcome, answers, self._row, self._loop.promise.broken(self._reached)
        )
