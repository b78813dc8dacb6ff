"""The tree's bits: on any number of threads, in any work space, unit of length and process."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

import numba
import numpy as np
import pytest
from numpy.typing import NDArray

import driftwell
from driftwell.coulomb.tree import (
    TreeSettings,
    settings_for,
    tree_sum,
    tree_workspace,
)
from driftwell.kernels.threads import on_threads
from tests.tree.clouds import CLOUDS

Floats = NDArray[np.float64]

COARSE = settings_for(1e-2)
COUNTS = [1, 2, 33, 700, 9000, 120_000]
THREADS = [each for each in (1, 2, 3, 4) if each <= numba.config.NUMBA_NUM_THREADS]
SHAPES = ["gaussian", "needle", "clustered", "even signs"]


def field(
    place: Floats,
    charge: Floats,
    threads: int = 1,
    work: Floats | None = None,
    settings: TreeSettings = COARSE,
) -> Floats:
    """The tree's field (3, n); in a new work space if none is given."""
    out = np.full_like(place, np.nan)
    if work is None:
        work = tree_workspace(charge.size, threads, settings, mixed=True)
    with on_threads(threads):
        tree_sum()(place, charge, 0.0, 9e9, work, out)
    assert np.isfinite(out).all()
    return out


@pytest.mark.skipif(len(THREADS) < 2, reason="needs two threads")
@pytest.mark.parametrize("shape", SHAPES)
@pytest.mark.parametrize("n", COUNTS)
def test_threads_change_no_bit(shape: str, n: int) -> None:
    """Also where the work space is laid out for more or fewer than there are."""
    place, charge = CLOUDS[shape](n)
    results = {field(place, charge, threads).tobytes() for threads in THREADS}
    for workers in (1, 2, 5):
        work = tree_workspace(n, workers, COARSE, mixed=True)
        results |= {field(place, charge, threads, work).tobytes() for threads in THREADS[:2]}
    assert 1 == len(results)


@pytest.mark.skipif(len(THREADS) < 2, reason="needs two threads")
def test_threads_change_no_bit_of_softened_fields_and_potentials() -> None:
    """The basis with the most in it, again and again: who comes first differs each time."""
    place, charge = CLOUDS["gaussian"](6000)
    settings = settings_for(1e-4)
    results = set()
    for threads in THREADS * 5:
        out = np.full((4, 6000), np.nan)
        with on_threads(threads):
            work = tree_workspace(6000, threads, settings, softened=True)
            tree_sum()(place, charge, 1e-4, 9e9, work, out)
        assert np.isfinite(out).all()
        results.add(out.tobytes())
    assert 1 == len(results)


def test_what_a_work_space_was_used_for_before_changes_no_bit() -> None:
    """The same charges again, others, fewer, such as are nowhere, or rubbish."""
    n = 3000
    place, charge = CLOUDS["plummer"](n)
    expected = field(place, charge).tobytes()
    work = tree_workspace(n, 2, COARSE, mixed=True)
    head = work[0, :64].copy()
    assert expected == field(place, charge, 2, work).tobytes()
    assert expected == field(place, charge, 1, work).tobytes()
    for shape in ("needle", "clustered", "even signs"):
        field(*CLOUDS[shape](n), 2, work)
        assert expected == field(place, charge, 2, work).tobytes()
    field(*CLOUDS["ball"](n // 3 + 1), 2, work)
    assert expected == field(place, charge, 2, work).tobytes()
    with on_threads(2):
        nowhere = np.full_like(place, np.nan)
        tree_sum()(nowhere, charge, 0.0, 9e9, work, np.empty_like(place))
    assert expected == field(place, charge, 2, work).tobytes()
    for rubbish in (np.nan, np.inf, -1e300, 3.0):
        work[:] = rubbish
        work[0, :64] = head
        assert expected == field(place, charge, 2, work).tobytes()


def test_fewer_charges_in_a_larger_work_space_have_the_same_bits() -> None:
    place, charge = CLOUDS["gaussian"](1000)
    expected = field(place, charge).tobytes()
    work = tree_workspace(5000, 1, COARSE, mixed=True)
    assert expected == field(place, charge, 1, work).tobytes()


@pytest.mark.parametrize("k", [-60, -1, 3, 40])
@pytest.mark.parametrize("shape", ["gaussian", "clustered"])
def test_places_times_a_power_of_two_have_fields_over_its_square(shape: str, k: int) -> None:
    """Bit for bit: the tree works in units of such a power; softened ones and potentials too."""
    place, charge = CLOUDS[shape](4000)
    scaled = field(place * 2.0**k, charge) * 2.0 ** (2 * k)
    assert field(place, charge).tobytes() == scaled.tobytes()
    settings = settings_for(1e-4)
    made, work = tree_sum(), tree_workspace(4000, 1, settings, softened=True)
    out, other = np.empty((4, 4000)), np.empty((4, 4000))
    made(place, charge, 1e-4, 9e9, work, out)
    made(place * 2.0**k, charge, 1e-4 * 2.0 ** (2 * k), 9e9, work, other)
    other *= 2.0**k
    other[:3] *= 2.0**k
    assert out.tobytes() == other.tobytes()


SUMS = """
import hashlib
import numpy as np
from driftwell.coulomb.tree import settings_for, tree_sum, tree_workspace
settings = settings_for(1e-2)
for name in {names}:
    softened = name != "field"
    random, digest = np.random.default_rng(6), hashlib.sha256()
    for n in (3, 30, 600, 4000):
        place, charge = random.normal(size=(3, n)), random.uniform(-1.0, 1.0, n)
        out = np.zeros((4 if softened else 3, n))
        work = tree_workspace(n, 2, settings, softened, mixed=True)
        tree_sum()(place, charge, 0.0, 9e9, work, out)
        digest.update(out.tobytes())
    print(digest.hexdigest())
"""


def digests_of_sums(names: list[str], cache: Path | None = None) -> list[str]:
    """What a new process finds, sums used in the order of their names."""
    sources = Path(driftwell.__file__).resolve().parent.parent
    kept = {} if cache is None else {"DRIFTWELL_CACHE": str(cache)}
    done = subprocess.run(
        [sys.executable, "-c", SUMS.format(names=names)],
        env={**os.environ, "PYTHONPATH": str(sources), **kept},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    return done.stdout.split()


def test_the_same_from_a_process_that_compiles_and_one_that_loads(tmp_path: Path) -> None:
    """Compiled after another sum, loaded alone, loaded before it, and as compiled for all tests.

    What two sums use is compiled once and linked from whichever came first. Two compilations take
    most of a minute.
    """
    cold = digests_of_sums(["potential", "field"], tmp_path)
    assert cold[1:] == digests_of_sums(["field"], tmp_path)
    assert cold[::-1] == digests_of_sums(["field", "potential"], tmp_path)
    assert cold[1:] == digests_of_sums(["field"])
