"""What a run will cost, before it is begun: time, memory and disk, from a few seconds of its own.

What is timed are the scenario's own first steps on this machine, with the record's work at them.
The whole follows from the numbers of steps, records and segments. It holds as far as later steps
cost what the first ones do: a sum over fewer charges is cheaper, so losses shorten a run.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, replace
from typing import Literal

import numpy as np

from driftwell.assembly import Assembly, assembled
from driftwell.coulomb.crossover import LEAST
from driftwell.coulomb.summation import Summation, manner_for
from driftwell.forms import spelled
from driftwell.kernels.threads import on_threads
from driftwell.record.form import DEFAULT_RECORDS
from driftwell.scenario.read import LoadedScenario
from driftwell.stepping.schedule import RECORD, SNAPSHOT, Schedule
from driftwell.timed_run import (
    RecordCost,
    Stretch,
    TimedRecord,
    copy_of,
    spare_folder,
    timed_steps,
    with_half,
    without_coulomb,
)

Part = Literal["the pair sum", "fields and motion", "the record"]

NOISE, NOISE_OF_FEW, FEW = 0.1, 0.3, 10
"""Part of its time by which a run may differ from what was timed, at the least; more where only few
steps could be timed, and how many are few."""
WORTH = 0.95
"""Of the time: what a change must bring it below to be named."""
_RECORD, _OFF, _HALF = 0.1, 0.15, 0.25
"""Parts of the seconds for the record, steps without pair sum, and half the charges."""


@dataclass(frozen=True, slots=True)
class Change:
    """Something that would make a run cheaper.

    words : what; settings : how it is given beside the scenario, empty where that is not one key
    seconds : s that the run would then take
    """

    words: str
    settings: tuple[str, ...]
    seconds: float


@dataclass(frozen=True, slots=True)
class Estimate:
    """What a run will cost; times are s by the clock from its first step to its last record.

    charges, threads : as it would be run
    method, because : the Coulomb sum, and why that one
    steps, records, snapshots, segments : numbers of them; records with those for snapshots only
    seconds, least, most : the whole run, and the range it should lie in
    parts : s of the whole by what they go to
    memory : bytes at the busiest time
    disk : bytes of the record; events : bytes besides, if every charge passes every detector
        once and all are lost
    timed : the steps that were timed
    ended : whether every charge was lost within them, and the run with them
    changes : what would make it cheaper, the cheapest first
    """

    charges: int
    threads: int
    method: str
    because: str
    steps: int
    records: int
    snapshots: int
    segments: int
    seconds: float
    least: float
    most: float
    parts: dict[Part, float]
    memory: int
    disk: int
    events: int
    timed: Stretch
    ended: bool
    changes: tuple[Change, ...]

    @property
    def dominant(self) -> Part:
        """What most of the time goes to."""
        return max(self.parts, key=self.parts.__getitem__)


@dataclass(frozen=True, slots=True)
class _Times:
    """What was found by the clock: s a step in whole and without pair sum, and the record's."""

    stretch: Stretch
    off: float
    half: float | None
    record: RecordCost


def estimate(
    loaded: LoadedScenario,
    threads: int = 1,
    seconds: float = 5.0,
    begins: Callable[[Assembly, Summation], None] | None = None,
    told: Callable[[str], None] | None = None,
) -> Estimate:
    """What a run of the scenario will cost; takes about `seconds` s besides setting it up.

    begins : called when the charges are placed and the Coulomb sum is chosen
    told : hears of the electrodes' field, where that has to be solved first

    Raises
    ------
    ScenarioError
        The charges cannot be placed as the scenario says, or the run would not fit in memory.
    StepError
        The motion cannot be continued beyond the first steps; a run would fail likewise.
    RecordError
        Nothing can be written to the folder for temporary files.
    """
    with on_threads(threads) as given:
        parts = assembled(loaded, told=told)
        start = replace(parts, particles=copy_of(parts.particles))
        loop = parts.time_loop(given)
        if begins is not None:
            begins(parts, loop.summation)
        with spare_folder() as folder:
            record = TimedRecord(loaded, parts, loop, folder).cost(_RECORD * seconds)
        rest = 1.0 - _RECORD - _OFF - _HALF
        summation = loop.summation
        stretch = timed_steps(loop, rest * seconds)
        off = None
        if summation.method != "off":
            off = without_coulomb(start, given, _OFF * seconds)
        half = with_half(start, given, _HALF * seconds) if len(start.particles) > 1 else None
        times = _Times(
            stretch,
            stretch.step if off is None else min(off, stretch.step),
            half,
            record,
        )
        ended = loop.over
        done = loop.steps_done if ended else parts.schedule.total_steps
        return _whole(parts, summation, times, done, given, ended)


def _whole(
    parts: Assembly,
    summation: Summation,
    times: _Times,
    steps: int,
    threads: int,
    ended: bool,
) -> Estimate:
    """The whole run, from what was timed of it."""
    schedule, extent, record = parts.schedule, parts.extent, times.record
    records = int(np.count_nonzero(schedule.flags & (RECORD | SNAPSHOT)))
    if ended:
        done = steps / schedule.total_steps
        records = min(records, math.ceil(records * done) + 1)
        extent = replace(extent, records=records, samples=math.ceil(extent.samples * done))
    stepping = steps * times.stretch.step
    rows = records * record.record + extent.rows() * record.byte
    segments = extent.segments(stepping + rows)
    recording = rows + segments * record.segment
    pairs = stepping - steps * times.off
    seconds = stepping + recording
    power = 1 if summation.method == "tree" else 2
    kept = _kept(times.stretch, steps, power), _kept(times.stretch, steps, 1)
    noise = NOISE if times.stretch.steps >= FEW else NOISE_OF_FEW
    shortest = min(times.stretch.fastest / times.stretch.step, 1.0 - noise)
    longest = max(times.stretch.slowest / times.stretch.step, 1.0 + noise)
    fewer = pairs * kept[0] + (stepping - pairs) * kept[1]
    return Estimate(
        charges=extent.charges,
        threads=threads,
        method=summation.method,
        because=summation.because,
        steps=steps,
        records=records,
        snapshots=extent.snapshots,
        segments=segments,
        seconds=seconds,
        least=(fewer + recording) * shortest,
        most=seconds * longest,
        parts={
            "the pair sum": pairs,
            "fields and motion": stepping - pairs,
            "the record": recording,
        },
        memory=extent.memory(),
        disk=extent.disk(stepping + rows),
        events=extent.events(),
        timed=times.stretch,
        ended=ended,
        changes=tuple(
            sorted(
                (
                    change
                    for change in _changes(parts, summation, times, (stepping, recording), threads)
                    if change.seconds < WORTH * seconds
                ),
                key=lambda change: change.seconds,
            )
        ),
    )


def _kept(stretch: Stretch, steps: int, power: int) -> float:
    """Cost of a step over that of one timed, on the average, were losses to go on as they did.

    A step costs a power of the number of charges left, which then falls as exp(-r k) after k steps.
    Where more are born than lost it does not, and nothing is taken off.
    """
    if stretch.left == 0 or stretch.left >= stretch.alive:
        return 1.0
    rate = power * math.log(stretch.alive / stretch.left) / stretch.steps

    def mean(over: int) -> float:
        return -math.expm1(-rate * over) / (rate * over)

    return min(mean(steps) / mean(stretch.steps), 1.0)


def _changes(
    parts: Assembly,
    summation: Summation,
    times: _Times,
    goes_to: tuple[float, float],
    threads: int,
) -> list[Change]:
    """What the run would take if something about it were changed, cheaper or not.

    goes_to : s of the whole for the steps, and for the record
    """
    scenario, schedule, (stepping, recording) = parts.scenario, parts.schedule, goes_to
    stretch, form = times.stretch, scenario.coulomb
    found = []
    if times.half is not None:
        half = stepping * times.half / stretch.step + recording
        found.append(Change("half the charges, each of twice the weight", (), half))
    fewer = twice_as_long(schedule, scenario.stepping.coulomb_every) / schedule.total_steps
    if scenario.stepping.step == "auto":
        setting = f"stepping.steps_per_period={scenario.stepping.steps_per_period / 2.0:g}"
    else:
        setting = f"stepping.step={spelled(2.0 * float(scenario.stepping.step), 's')}"
    found.append(Change("steps twice as long", (setting,), stepping * fewer + recording))
    every = scenario.record.every or scenario.duration / DEFAULT_RECORDS
    found.append(
        Change(
            "half as many records",
            (f"record.every={spelled(2.0 * every, 's')}",),
            stepping + 0.5 * recording,
        )
    )
    n = len(parts.particles)
    if summation.method == "direct" and form.method == "direct" and n >= LEAST:
        auto = form.model_copy(update={"method": "auto"})
        border = manner_for(auto, n, threads).crossover
        pairs = stepping * (1.0 - times.off / stretch.step)
        words = f"the tree, whose sums err by {form.accuracy:g} of the force"
        tree = stepping - pairs + pairs * min(border / n, 1.0) + recording
        found.append(Change(words, ("coulomb.method=tree",), tree))
    return found


def twice_as_long(schedule: Schedule, multiple: int) -> int:
    """Steps of the schedule if each might be twice as long; marks are kept."""
    counts = np.ceil(schedule.steps / (2.0 * multiple)).astype(np.int64)
    return int(multiple * np.maximum(counts, 1).sum())
