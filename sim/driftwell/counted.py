"""What a run is in numbers, before any step of it: charges, steps, records, memory, disk.

Nothing is timed and nothing solved. Where the step follows from the field of electrodes that was
not solved yet, steps cannot be told, nor what depends on them.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from driftwell.assembly import Assembly, assembled
from driftwell.coulomb.crossover import LEAST
from driftwell.coulomb.summation import pairs_in_one_sum
from driftwell.scenario.read import LoadedScenario
from driftwell.solved.acting import field_is_kept
from driftwell.stepping.schedule import RECORD, SNAPSHOT

PAIRS_PER_SECOND = 1e9
"""Pairs a thread sums in a second, at the best."""


@dataclass(frozen=True, slots=True)
class Count:
    """A run in numbers.

    charges, born : simulated charges, and those of them that are born on the way
    steps : None where the electrodes' field decides them, and is not solved; then records,
        snapshots, memory and disk are without the samples that follow from it
    step, because : s, and what decided it
    method : the Coulomb sum, in words
    records, snapshots : numbers of them
    memory, disk, events : bytes, as of :class:`driftwell.estimate.Estimate`; the disk at the least
    least : s, that the pairs alone take at the best; None where steps are not known
    """

    charges: int
    born: int
    steps: int | None
    step: float
    because: str
    method: str
    records: int
    snapshots: int
    memory: int
    disk: int
    events: int
    least: float | None


def counted(loaded: LoadedScenario, threads: int = 1) -> tuple[Count, Assembly]:
    """A run in numbers, and the parts that were counted.

    Raises ScenarioError where the charges cannot be placed, or the run would not fit in memory.
    """
    parts = assembled(loaded, solve=False)
    return count_of(parts, loaded, threads), parts


def count_of(parts: Assembly, loaded: LoadedScenario, threads: int) -> Count:
    """The numbers of parts that were put together."""
    scenario, schedule, extent = parts.scenario, parts.schedule, parts.extent
    stated = scenario.stepping.step != "auto"
    known = parts.acting is not None or stated or field_is_kept(scenario, loaded.folder)
    everyone = len(parts.particles) + (0 if parts.unborn is None else len(parts.unborn))
    pairs = pairs_in_one_sum(scenario.coulomb, everyone)
    steps = schedule.total_steps if known else None
    sums = schedule.total_steps / scenario.stepping.coulomb_every
    return Count(
        charges=everyone,
        born=everyone - len(parts.particles),
        steps=steps,
        step=parts.choice.step,
        because=parts.choice.because,
        method=_method(parts, everyone),
        records=int(np.count_nonzero(schedule.flags & (RECORD | SNAPSHOT))),
        snapshots=extent.snapshots,
        memory=extent.memory(),
        disk=extent.disk(),
        events=extent.events(),
        least=None if steps is None else pairs * sums / (PAIRS_PER_SECOND * threads),
    )


def _method(parts: Assembly, charges: int) -> str:
    """The Coulomb sum in words; which one is faster is timed elsewhere."""
    form = parts.scenario.coulomb
    if form.method == "off":
        return "charges do not push each other"
    if form.method == "direct" or charges < LEAST:
        return "every pair is summed"
    if form.method == "tree":
        return f"a tree that errs by {form.accuracy:g} of the force"
    return f"every pair, or a tree to {form.accuracy:g} of the force where that is faster here"
