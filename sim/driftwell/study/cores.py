"""How a sweep shares the cores: many runs side by side on one thread each, few large ones on more.

A run on one thread wastes nothing, so with many runs left that is the fastest for all of them. With
few, cores would stand idle at the end; then fewer runs go side by side, on more threads each. Few
charges never gain by threads.
"""

from __future__ import annotations

import math
import os
from dataclasses import dataclass

from driftwell.coulomb.direct import THREADED
from driftwell.coulomb.form import Coulomb
from driftwell.stepping.blocks import MANY

FEW, GAIN_OF_FEW, GAIN = 2000, 1.5, 1.8
"""How many times as fast a run is on twice the threads, below so many charges and from there on.

Measured with the direct sum: 1.5 at 512 to 1000 charges, 1.8 at 2000, 1.94 at 4096.
"""


@dataclass(frozen=True, slots=True)
class Sharing:
    """So many runs side by side, on so many threads each, and why in words."""

    workers: int
    threads: int
    because: str


@dataclass(frozen=True, slots=True)
class Load:
    """What is to be shared.

    left : runs to compute, at least one
    charges : of the largest; pays : from how many on threads pay
    memory : bytes the largest takes; free : bytes there are, None where the system does not say
    """

    left: int
    charges: int
    pays: int
    memory: int
    free: int | None


def usable_cores() -> int:
    """Processors this process may use."""
    return len(os.sched_getaffinity(0))


def threads_pay_from(coulomb: Coulomb) -> int:
    """Charges from which on a run gains by a second thread."""
    return MANY if coulomb.method == "off" else THREADED


def shared(
    load: Load, cores: int, workers: int | None = None, threads: int | None = None
) -> Sharing:
    """Share the cores; `workers` and `threads` are what the user asked for, None where nothing."""
    left = load.left
    fit = left if load.free is None else max(1, min(left, load.free // max(1, load.memory)))
    if workers is not None:
        side = min(workers, left)
        each = threads or (1 if load.charges < load.pays else max(1, cores // side))
        return Sharing(side, each, _shown(side, each, "as asked for"))
    if threads is not None:
        side = max(1, min(cores // threads, fit))
        return Sharing(side, threads, _shown(side, threads, "as asked for"))
    most = 1 if load.charges < load.pays else cores
    gain = math.log2(GAIN_OF_FEW if load.charges < FEW else GAIN)
    each = min(range(1, most + 1), key=lambda k: _time(left, min(fit, cores // k), k, gain))
    side = min(fit, cores // each)
    return Sharing(side, each, _shown(side, each, _reason(load, fit, side, each, cores)))


def _time(left: int, side: int, threads: int, gain: float) -> float:
    """Time of all runs, in that of one on one thread; `threads` to the power `gain` as fast."""
    return math.ceil(left / side) / math.pow(threads, gain)


def _reason(load: Load, fit: int, side: int, threads: int, cores: int) -> str:
    left = load.left
    count = "1 run is" if left == 1 else f"{left} runs are"
    if load.charges < load.pays:
        reason = f"{count} left, and threads pay only from {load.pays} charges on"
    elif threads == 1:
        reason = f"{count} left, and a run on one thread wastes nothing"
    else:
        reason = f"{count} left of up to {load.charges} charges: this ends soonest"
    if side == fit < min(left, cores):
        reason += f"; no more of them fit in memory at {load.memory / 1e9:.3g} GB each"
    return reason


def _shown(side: int, threads: int, reason: str) -> str:
    runs = "one run at a time" if side == 1 else f"{side} runs side by side"
    each = "" if side == 1 else " each"
    return f"{runs} on {threads} thread{'s' * (threads != 1)}{each}: {reason}"
