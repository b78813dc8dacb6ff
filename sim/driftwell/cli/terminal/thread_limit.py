"""How many threads compiled code may use, settled before it is loaded."""

from __future__ import annotations

import argparse
import os
import sys
from contextlib import suppress

from driftwell.cli.options.types import threads as number_of_threads
from driftwell.cli.terminal.printing import tell


def limited_threads(asked: int | None) -> int:
    """Settle the number of threads: as asked, as the environment says, or one for each core.

    numba reads its limit once, when it is loaded, and minds another one later: call this before.
    """
    threads = usable_threads(asked)
    if "numba" not in sys.modules:
        os.environ["NUMBA_NUM_THREADS"] = str(threads)
    return threads


def usable_threads(asked: int | None) -> int:
    """The number of threads, by argument, environment and cores, in this order."""
    cores = usable_cores()
    if asked is None:
        try:
            return number_of_threads(os.environ.get("NUMBA_NUM_THREADS", ""))
        except argparse.ArgumentTypeError:
            return cores
    if asked > cores:
        tell(f"{asked} threads on {cores} core{'s' * (cores != 1)}: no faster than {cores}.")
    return asked


def usable_cores() -> int:
    """Cores this process may run on; all, where the system does not say."""
    affinity = getattr(os, "sched_getaffinity", None)
    if affinity is not None:
        with suppress(OSError):
            return len(affinity(0))
    return os.cpu_count() or 1
