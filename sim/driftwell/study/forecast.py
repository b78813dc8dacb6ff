"""What a sweep will cost: a few of its runs are timed, the others lie between them.

Runs are put in order of charges times duration, and at most :data:`TIMED` of them, evenly chosen
with the first and the last, are estimated by their own steps. Time and disk of a run between two of
these follow from its place between them, on logarithmic scales.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.assembly import Assembly
from driftwell.counted import counted
from driftwell.errors import DriftwellError
from driftwell.estimate import Estimate, estimate
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.study.cores import Sharing, shared, usable_cores
from driftwell.study.missing import Needed, load_of, needed_by
from driftwell.study.points import Case
from driftwell.study.read import Study

TIMED = 5
"""Most runs that are timed."""
LOOKED_AT = 100
"""Most cases that are read where nothing is timed."""
BESIDES = 0.1
"""s that a run takes besides its steps and records: reading, setting up, answers, files."""


@dataclass(frozen=True, slots=True)
class Forecast:
    """What all runs of a sweep will cost together, those that are there already included.

    cases, runs : how many, and how many of them differ
    refused : cases that are no scenario, with the reason of the first
    sharing : how the cores would be shared
    seconds, least, most : s by the clock; work : s of all runs, each for itself
    longest : s of the longest run
    memory : bytes at the busiest time, of the runs side by side; disk : bytes of all records
    timed : the runs that were timed, from the smallest to the largest
    """

    cases: int
    runs: int
    refused: tuple[int, str]
    sharing: Sharing
    seconds: float
    least: float
    most: float
    work: float
    longest: float
    memory: int
    disk: int
    timed: tuple[Estimate, ...]


@dataclass(frozen=True, slots=True)
class Outlook:
    """What all runs of a sweep are, without timing any.

    cases, runs, refused, sharing : as of :class:`Forecast`, of the cases looked at
    looked_at : how many cases were looked at
    charges : of the smallest run and of the largest
    memory : bytes at the busiest time, of the runs side by side
    case : number of the case with the largest run (charges times duration); parts : it
    """

    cases: int
    looked_at: int
    runs: int
    refused: tuple[int, str]
    sharing: Sharing
    charges: tuple[int, int]
    memory: int
    case: int
    parts: Assembly


@dataclass(frozen=True, slots=True)
class _Sized:
    """A run's scenario, what it needs, and how large it is: charges times seconds of motion."""

    loaded: LoadedScenario
    needed: Needed
    size: float
    case: int


def forecast(
    study: Study, seconds: float = 5.0, workers: int | None = None, threads: int | None = None
) -> Forecast:
    """What a sweep will cost; takes about `seconds` s besides reading its cases and setting up.

    workers, threads : what the user asks for; None where the sweep is to find out

    Raises DriftwellError where one of the runs that are timed cannot be carried out.
    """
    runs, refused = _runs(study, study.cases)
    runs.sort(key=lambda run: run.size)
    load = load_of([run.needed for run in runs])
    sharing = shared(load, usable_cores(), workers, threads)
    chosen = np.unique(np.linspace(0, len(runs) - 1, TIMED).round().astype(int))
    timed = tuple(estimate(runs[k].loaded, sharing.threads, seconds / len(chosen)) for k in chosen)
    sizes = np.array([run.size for run in runs])
    at = sizes[chosen]
    each = BESIDES + _between(sizes, at, [found.seconds for found in timed])
    low = BESIDES + _between(sizes, at, [found.least for found in timed])
    high = BESIDES + _between(sizes, at, [found.most for found in timed])
    disk = _between(sizes, at, [float(found.disk) for found in timed])
    return Forecast(
        cases=len(study.cases),
        runs=len(runs),
        refused=refused,
        sharing=sharing,
        seconds=_by_the_clock(each, sharing.workers),
        least=_by_the_clock(low, sharing.workers),
        most=_by_the_clock(high, sharing.workers),
        work=float(each.sum()),
        longest=float(each.max()),
        memory=sharing.workers * max([load.memory, *(found.memory for found in timed)]),
        disk=math.ceil(disk.sum()),
        timed=timed,
    )


def outlook(study: Study) -> Outlook:
    """What a sweep is in numbers; of many cases some are looked at, evenly chosen.

    Raises DriftwellError where the largest of the runs cannot be put together.
    """
    number = min(len(study.cases), LOOKED_AT)
    chosen = np.unique(np.linspace(0, len(study.cases) - 1, number).round().astype(int))
    runs, refused = _runs(study, [study.cases[k] for k in chosen])
    sharing = shared(load_of([run.needed for run in runs]), usable_cores())
    largest = max(runs, key=lambda run: run.size)
    count, parts = counted(largest.loaded)
    counts = [run.needed.charges for run in runs]
    return Outlook(
        cases=len(study.cases),
        looked_at=len(chosen),
        runs=len(runs),
        refused=refused,
        sharing=sharing,
        charges=(min(counts), max(counts)),
        memory=sharing.workers * max([count.memory, *(run.needed.memory for run in runs)]),
        case=largest.case,
        parts=parts,
    )


def _runs(study: Study, cases: Sequence[Case]) -> tuple[list[_Sized], tuple[int, str]]:
    """The runs that differ, and how many cases are no scenario; raises where none is one."""
    found: dict[str, _Sized] = {}
    refused = 0
    first = ""
    for case in cases:
        try:
            loaded = read_scenario(study.scenario_path, case.settings)
        except DriftwellError as fault:
            refused, first = refused + 1, first or str(fault)
            continue
        if loaded.digest not in found:
            needed = needed_by(loaded)
            size = needed.charges * loaded.scenario.duration
            found[loaded.digest] = _Sized(loaded, needed, size, case.number)
    if not found:
        raise DriftwellError(f"No case of the study is a scenario that can be run: {first}")
    return list(found.values()), (refused, first)


def _between(
    sizes: NDArray[np.float64], at: NDArray[np.float64], values: Sequence[float]
) -> NDArray[np.float64]:
    """A value for each size, from those known at some of them; the mean where sizes are equal."""
    known = np.unique(at)
    means = [
        float(np.mean([value for size, value in zip(at, values, strict=True) if size == each]))
        for each in known
    ]
    floor = 1e-9  # of what takes no time there is no logarithm
    return np.exp(np.interp(np.log(sizes), np.log(known), np.log(np.maximum(means, floor))))


def _by_the_clock(each: NDArray[np.float64], workers: int) -> float:
    """Time of all runs side by side: no less than the longest of them."""
    return max(float(each.sum()) / workers, float(each.max()))
