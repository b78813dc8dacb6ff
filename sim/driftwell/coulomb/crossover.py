"""From how many charges on the tree is faster than the direct sum, on this machine.

Both are timed on a ball of charges; the direct sum costs as n^2, so one timing tells all, and the
tree is timed at growing n until it wins. What was found is kept beside the machine code, which is
made anew for every version, by processor, threads and the settings of both sums.
"""

from __future__ import annotations

import json
import math
import os
import tempfile
import time
from contextlib import suppress
from dataclasses import astuple, dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.coulomb.direct import direct_sum, workspace
from driftwell.coulomb.pair_sum import PairSum
from driftwell.coulomb.tree import TreeSettings, tree_sum, tree_workspace
from driftwell.kernels.compiled import kept_in
from driftwell.kernels.processor import processor

LEAST = 2000
"""Below this many charges no tree pays, and nothing is measured."""
_DIRECT = 4096
_TREE = (2000, 4000, 8000, 16000, 32000, 64000)
_SECONDS = 1.5
"""s, after which the tree is not timed at more charges."""
_TIMES = 6
"""Runs of each sum, of which the shortest counts: other programs may be at work."""
_FILE = "crossover.json"

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Contest:
    """The two sums that are timed against each other.

    softened : whether a softening length is in the force law
    tree_mixed, direct_mixed : whether pairs are summed in mixed precision
    """

    settings: TreeSettings
    softened: bool
    tree_mixed: bool
    direct_mixed: bool
    threads: int

    def key(self) -> str:
        """What the outcome depends on besides the version of the program."""
        parts = (
            processor(),
            os.cpu_count(),
            self.threads,
            *astuple(self.settings),
            self.softened,
            self.tree_mixed,
            self.direct_mixed,
        )
        return "; ".join(str(part) for part in parts)


def crossover(contest: Contest) -> int:
    """Number of charges from which on the tree is faster; timed where it is not known yet."""
    key = contest.key()
    file = kept_in() / _FILE
    known = _known(file)
    if key not in known:
        known[key] = timed(contest)
        _keep(file, {**_known(file), key: known[key]})
    return known[key]


def timed(contest: Contest) -> int:
    """The crossover, timed now, to two digits; takes a second or two."""
    direct = _direct_seconds(contest) / _DIRECT**2
    before: tuple[int, float] | None = None
    began = time.perf_counter()
    for n in _TREE:
        ratio = _tree_seconds(contest, n) / (direct * n**2)
        if ratio <= 1.0 or time.perf_counter() - began > _SECONDS or n == _TREE[-1]:
            return max(LEAST, _two_digits(_crossing(before, (n, ratio))))
        before = n, ratio
    raise AssertionError("the last of the numbers ends the loop")


def _crossing(before: tuple[int, float] | None, last: tuple[int, float]) -> float:
    """Where the ratio of times, a power of n between two numbers and as 1/n beyond, is 1."""
    n, ratio = last
    if ratio > 1.0 or before is None:
        return n * ratio
    slope = math.log(ratio / before[1]) / math.log(n / before[0])
    return n * math.exp(-math.log(ratio) / slope)


def _two_digits(number: float) -> int:
    return int(float(f"{number:.1e}"))


def _direct_seconds(contest: Contest) -> float:
    n = _DIRECT
    summed = direct_sum(n, contest.threads, contest.direct_mixed)
    return _least_seconds(contest, summed, n, workspace(n))


def _tree_seconds(contest: Contest, n: int) -> float:
    work = tree_workspace(
        n, contest.threads, contest.settings, contest.softened, contest.tree_mixed
    )
    return _least_seconds(contest, tree_sum(), n, work)


def _least_seconds(contest: Contest, summed: PairSum, n: int, work: Floats) -> float:
    """The shortest of several runs after one that is not timed, s."""
    position, charge = _ball(n)
    softening2 = 1e-12 if contest.softened else 0.0
    field = np.empty((3, n))
    least = math.inf
    for k in range(_TIMES + 1):
        began = time.perf_counter()
        summed(position, charge, softening2, COULOMB_CONSTANT, work, field)
        if k > 0:
            least = min(least, time.perf_counter() - began)
    return least


def _ball(n: int) -> tuple[Floats, Floats]:
    """`n` elementary charges evenly drawn in a ball of 1 mm."""
    random = np.random.default_rng(1)
    direction = random.normal(size=(3, n))
    radius = 1e-3 * random.random(n) ** (1.0 / 3.0)
    place = direction * (radius / np.sqrt((direction**2).sum(axis=0)))
    return np.ascontiguousarray(place), np.full(n, ELEMENTARY_CHARGE)


def _known(file: Path) -> dict[str, int]:
    """What was timed before; nothing where it cannot be read."""
    try:
        found = json.loads(file.read_text())
    except (OSError, ValueError, RecursionError):
        return {}
    if not isinstance(found, dict):
        return {}
    return {key: n for key, n in found.items() if type(n) is int and n >= LEAST}


def _keep(file: Path, known: dict[str, int]) -> None:
    """Write what is known, whole or not at all; where that cannot be it is timed again."""
    with suppress(OSError):
        handle, name = tempfile.mkstemp(prefix=file.stem, dir=file.parent)
        try:
            with os.fdopen(handle, "w") as out:
                json.dump(known, out, indent=1)
            Path(name).replace(file)
        except OSError:
            Path(name).unlink(missing_ok=True)
            raise
