"""The schedule: the duration cut where something must happen exactly then.

Records, snapshots, trace samples and the breaks of waveforms are *marks*. Between two marks the
motion takes a whole number of equal steps, none longer than asked; a step's time is counted from
the mark before it by an integer, so it never drifts, and no waveform jumps inside a step.
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError

TRACE = 1
"""Sample the traced coordinates at this mark."""
RECORD = 2
"""Hand over to the record at this mark."""
BREAK = 4
"""A waveform jumps, or bends, at this mark."""
SNAPSHOT = 8
"""Record every charge at this mark."""

MOST_MARKS = 20_000_000
_MOST_STEPS = 1e15


@dataclass(frozen=True, slots=True)
class Schedule:
    """Marks and the steps between them.

    time : (m + 1,) float64, s, from 0 to the duration
    flags : (m + 1,) int64, what happens at each mark
    steps : (m,) int64, equal steps from each mark to the next
    """

    time: NDArray[np.float64]
    flags: NDArray[np.int64]
    steps: NDArray[np.int64]

    @property
    def total_steps(self) -> int:
        """Steps of the whole run."""
        return int(self.steps.sum())


def regular(every: float, duration: float) -> NDArray[np.float64]:
    """0, every, 2 every, ... up to the duration, which is always the last."""
    ratio = duration / every
    if not ratio < MOST_MARKS:
        raise ScenarioError(
            f"{ratio:.6g} marks of {every:g} s in {duration:g} s are more than {MOST_MARKS}: "
            f"take a longer interval"
        )
    count = math.floor(ratio * (1.0 + 1e-12))
    times = np.arange(count + 1, dtype=np.float64) * every
    if duration - times[-1] > 1e-9 * every:
        times = np.append(times, duration)
    else:
        times[-1] = duration
    return times


def schedule(
    duration: float,
    longest_step: float,
    marks: Iterable[tuple[int, NDArray[np.float64]]],
    multiple: int = 1,
) -> Schedule:
    """Merge the marks and count the steps between them.

    Parameters
    ----------
    duration : s
    longest_step : s
    marks : pairs of a flag and its times in [0, duration], s
    multiple : the number of steps between two marks is a multiple of this

    Raises
    ------
    ScenarioError
        There are more marks than fit in memory, or more steps than anybody can wait for.
    """
    times = [np.array([0.0, duration])]
    flags = [np.array([0, 0], dtype=np.int64)]
    for flag, at in marks:
        times.append(np.asarray(at, dtype=np.float64))
        flags.append(np.full(len(at), flag, dtype=np.int64))
    all_times = np.concatenate(times)
    all_flags = np.concatenate(flags)
    if all_times.size > MOST_MARKS:
        raise ScenarioError(
            f"{all_times.size} records, samples and waveform breaks are more than "
            f"{MOST_MARKS}: record or sample less often"
        )
    order = np.argsort(all_times, kind="stable")
    all_times, all_flags = all_times[order], all_flags[order]
    # times closer than a millionth of a step, and of their mean distance, are one mark
    close = 1e-6 * min(longest_step, duration / all_times.size)
    starts = np.append(True, np.diff(all_times) > close)
    index = np.cumsum(starts) - 1
    merged = np.zeros(int(index[-1]) + 1, dtype=np.int64)
    np.bitwise_or.at(merged, index, all_flags)
    time = all_times[starts].copy()
    time[-1] = duration
    spans = np.diff(time)
    if not duration / longest_step < _MOST_STEPS:
        raise ScenarioError(
            f"{duration / longest_step:.3g} steps of {longest_step:g} s in {duration:g} s are more "
            f"than {_MOST_STEPS:g}: take a longer step"
        )
    counts = np.ceil(spans / (longest_step * multiple) * (1.0 - 1e-9)).astype(np.int64)
    return Schedule(time, merged, multiple * np.maximum(counts, 1))
