"""One run: a scenario's parts are put together, moved through time, and what happens is kept.

The run itself prints nothing: an :class:`Observer` is told how far it is and may ask it to stop.
"""

from __future__ import annotations

import shlex
import time as clocks
from collections.abc import Sequence
from dataclasses import dataclass
from datetime import UTC, datetime
from pathlib import Path
from typing import Any, Protocol

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.answering import answer_all
from driftwell.answers.evidence import CloudFacts
from driftwell.answers.moments import moments_of
from driftwell.assembly import assembled
from driftwell.coulomb.promise import Broken
from driftwell.errors import ScenarioError, StepError
from driftwell.forms import spelled
from driftwell.kernels.threads import on_threads
from driftwell.ledger.ledger import Ledger, LedgerRow
from driftwell.particles.state import Particles
from driftwell.record.claim import refuse_taken
from driftwell.record.form import DEFAULT_TRACKS
from driftwell.record.header import Header, trace_name
from driftwell.record.heartbeat import Heartbeat
from driftwell.record.layout import dataset
from driftwell.record.outcome import Outcome
from driftwell.record.reader import open_run
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.record.writer import RunWriter
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario
from driftwell.scenario.room import refuse_beyond_disk
from driftwell.stepping.loop import Events
from driftwell.stepping.schedule import RECORD, SNAPSHOT, Schedule
from driftwell.stepping.step_choice import StepChoice

FINISHED, ALL_LOST, STOPPED, FAILED = "finished", "all lost", "stopped", "failed"
_MOVED = ("particles/position", "particles/velocity")
"""What the time loop changes of the particles."""
EXIT_CODES = {FINISHED: 0, ALL_LOST: 3, STOPPED: 4, FAILED: 5}


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
    force: bool = False,
) -> Result:
    """Execute a scenario, leaving its record in `folder`.

    force : begin even where memory or disk look too small; the observer is told

    Raises
    ------
    ScenarioError
        The charges cannot be placed as the scenario says, or the run would not fit in memory.
    RecordError
        The folder holds another run or cannot be written; the text says what is kept.
    """
    with on_threads(threads) as given:
        return _Execution(loaded, folder, observer, given, force).result()


class _Execution:
    """A run while it goes on."""

    def __init__(
        self,
        loaded: LoadedScenario,
        folder: Path,
        observer: Observer,
        threads: int,
        force: bool = False,
    ) -> None:
        created = datetime.now(UTC).isoformat(timespec="seconds")
        refuse_taken(folder, loaded.text.encode())
        warn = observer.told if force else None
        parts = assembled(loaded, warn)
        refuse_beyond_disk(parts.extent, folder, warn)
        scenario = parts.scenario
        self._scenario = scenario
        self._folder = folder
        self._observer = observer
        self._clouds = parts.clouds
        self._born = len(parts.particles)
        self._choice = parts.choice
        self._schedule = parts.schedule
        self._tracked = tracked_ids(scenario, parts.particles)
        observer.begins(parts.choice, parts.schedule, parts.particles)
        self._loop = parts.time_loop(threads)
        summation = self._loop.summation
        observer.told(f"Coulomb sum: {summation.method}; {summation.because}")
        self._writer = RunWriter.create(
            folder,
            Header(
                scenario=loaded.text,
                title=scenario.title,
                seed=scenario.seed,
                duration=scenario.duration,
                step=parts.choice.step,
                scheme=scenario.stepping.scheme,
                softening=scenario.coulomb.softening,
                coulomb_method=summation.method,
                coulomb_because=summation.because,
                coulomb_accuracy=scenario.coulomb.accuracy,
                clouds=parts.clouds,
                species=parts.species,
                walls=tuple(wall.name for wall in scenario.wall),
                detectors=tuple(detector.name for detector in scenario.detector),
                tracked=tuple(int(i) for i in self._tracked),
                traces=tuple(trace_name(request) for request in parts.requests),
                settings=loaded.settings,
                digest=loaded.digest,
                command=_command(loaded),
                threads=threads,
                created=created,
            ),
        )
        self._heartbeat = Heartbeat(folder)
        self._ledger = Ledger()
        self._row: LedgerRow | None = None
        self._state: dict[str, Any] = {}
        self._flags = 0
        self._began = 0.0

    def result(self) -> Result:
        """Go through all marks, then answer."""
        self._began = clocks.monotonic()
        flags = self._schedule.flags
        whole = spelled(self._scenario.duration, "s")
        word, sentence = FINISHED, f"The motion was followed to t = {whole}."
        self._record(0)
        try:
            for mark in np.flatnonzero(flags & (RECORD | SNAPSHOT))[1:]:
                if not self._loop.to_mark(int(mark), self._keep_going):
                    word = STOPPED
                    reached = spelled(self._reached, "s")
                    sentence = f"Asked to stop; the record up to t = {reached} is kept."
                    break
                gone = not self._loop.charges.alive.any()
                self._record(int(mark), last=gone)
                if gone:
                    word = ALL_LOST
                    sentence = f"Every charge was lost by t = {spelled(self._reached, 's')}."
                    break
        except StepError as fault:
            word, sentence = FAILED, f"The motion could not be continued {self._of_whom(fault)}"
        if word in {STOPPED, FAILED} and not self._flags & SNAPSHOT:
            # questions about the end are answered for the last record
            self._writer.snapshot(self._reached, particles_of(self._state))
        self._writer.seal(self._state)
        return self._finished(word, sentence)

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
        progress = self._progress()
        self._heartbeat.beats(progress)
        return self._observer.goes_on(progress)

    def _progress(self) -> Progress:
        loop = self._loop
        return Progress(
            time=loop.time,
            duration=self._scenario.duration,
            alive=int(np.count_nonzero(loop.charges.alive)),
            born=self._born,
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
        writer.ledger(ledger_rows(self._row))
        for events in loop.take_events():
            self._keep_events(events)
        for times, values in loop.take_samples():
            writer.trace(times, values)
        loop.remove_lost()
        if flags & RECORD or last:
            writer.trajectory(time, tracks_of(loop.particles, self._tracked))
            writer.moments(time, moment_rows(loop.particles, self._clouds))
        if flags & SNAPSHOT or last:
            writer.snapshot(time, loop.particles)
        self._keep_state()
        if writer.due(self._state):
            writer.seal(self._state)

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
        kept = {f"ledger/{name}": item for name, item in self._ledger.state().items()}
        self._state = {**state, **loop.state(), **kept}

    def _keep_events(self, events: Events) -> None:
        walls = len(self._scenario.wall)
        lost = events.surface < walls
        light2 = self._loop.plan.light2
        losses = np.zeros(int(lost.sum()), dataset("losses").dtype())
        crossings = np.zeros(int((~lost).sum()), dataset("crossings").dtype())
        for rows, chosen in ((losses, lost), (crossings, ~lost)):
            for name in ("time", "id", "cloud", "position", "velocity", "weight"):
                rows[name] = getattr(events, name)[chosen]
        losses["wall"] = events.surface[lost]
        squares = (losses["velocity"] ** 2).sum(axis=1)
        gamma = np.sqrt(1.0 + squares / light2)
        losses["kinetic_energy"] = events.mass[lost] * squares / (1.0 + gamma)
        crossings["detector"] = events.surface[~lost] - walls
        crossings["direction"] = events.direction[~lost]
        self._writer.losses(losses)
        self._writer.crossings(crossings)

    def _finished(self, word: str, sentence: str) -> Result:
        answers = answer_all(self._scenario.question, open_run(self._folder))
        outcome = Outcome(
            word=word,
            sentence=sentence,
            exit_code=EXIT_CODES[word],
            wall_time=clocks.monotonic() - self._began,
            steps=self._loop.steps_done,
        )
        self._writer.finish(outcome, answers)
        self._heartbeat.ends(self._progress(), word, sentence)
        if self._row is None:
            raise ScenarioError("the run kept no record")
        return Result(
            self._folder, outcome, answers, self._row, self._loop.promise.broken(self._reached)
        )


def _command(loaded: LoadedScenario) -> str:
    """The command that makes the same run again."""
    settings = [word for each in loaded.settings for word in ("--set", each)]
    text = shlex.join(["driftwell", "run", str(loaded.path), *settings])
    return text.encode(errors="backslashreplace").decode()  # names of files may be no text


def tracked_ids(scenario: Scenario, particles: Particles) -> NDArray[np.int64]:
    """Ids of the charges whose trajectories are kept, evenly chosen."""
    count = len(particles)
    wanted = scenario.record.tracks
    wanted = min(count, DEFAULT_TRACKS) if wanted is None else min(wanted, count)
    return np.unique(np.linspace(0, count - 1, wanted).round().astype(np.int64))


def tracks_of(particles: Particles, tracked: NDArray[np.int64]) -> NDArray[np.float64]:
    """State (tracked, 6) of the tracked charges, NaN where lost."""
    rows = np.full((len(tracked), 6), np.nan)
    if len(particles) == 0:
        return rows
    where = np.minimum(np.searchsorted(particles.id, tracked), len(particles) - 1)
    alive = particles.id[where] == tracked
    rows[alive, :3] = particles.position[:, where[alive]].T
    rows[alive, 3:] = particles.velocity[:, where[alive]].T
    return rows


def moment_rows(particles: Particles, clouds: Sequence[CloudFacts]) -> NDArray[Any]:
    """One row of moments for each cloud."""
    rows = np.zeros(len(clouds), dataset("moments").dtype())
    for row, cloud in zip(rows, clouds, strict=True):
        # charges stand in the order of their clouds
        first, last = np.searchsorted(particles.cloud, [cloud.index, cloud.index + 1])
        member = slice(first, last)
        found = moments_of(particles.position[:, member], particles.velocity[:, member], cloud.mass)
        for name in ("count", "centre", "covariance", "kinetic_energy", "kinetic_variance"):
            row[name] = getattr(found, name)
    return rows


def ledger_rows(row: LedgerRow) -> NDArray[Any]:
    """A ledger row in the record's type."""
    made = np.zeros(1, dataset("ledger").dtype())
    for name in dataset("ledger").dtype().names or ():
        made[0][name] = getattr(row, name)
    return made
