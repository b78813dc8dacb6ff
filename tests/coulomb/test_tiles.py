"""How the work of the direct sum is cut into groups."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.coulomb import direct
from driftwell.coulomb.direct import (
    BUFFER,
    SMALL,
    THREADED,
    TILE,
    groups,
    workspace,
    workspace_shape,
)
from driftwell.kernels import kernel


@kernel
def _deal(columns: int, group_count: int, out_group: np.ndarray) -> None:
    for c in range(columns):
        out_group[c] = direct.dealt(columns - 1 - c, group_count)


def dealt(n: int) -> tuple[np.ndarray, np.ndarray]:
    """Group of each column of tiles, and the pairs of tiles in that column."""
    columns = -(-n // TILE)
    group = np.full(columns, -1, dtype=np.int64)
    _deal(columns, groups(n), group)
    return group, np.arange(1, columns + 1)


@pytest.mark.parametrize("n", [0, 1, 64, 65, 511, 512, 1000, 2048, 5000, 8192, 20000])
def test_the_work_space_has_a_row_for_each_group(n: int) -> None:
    """Three sums for each charge, in whole vectors, and one tile; groups for threads only."""
    vectors = -(-n // 8)
    work = workspace(n)
    assert (groups(n), 3 * 8 * vectors + BUFFER) == work.shape == workspace_shape(n)
    assert 0 == work.ctypes.data % 64
    assert 0 == work.strides[0] % 64
    assert (groups(n) == 1) == (n < THREADED)


def test_groups_never_get_fewer_as_charges_become_more() -> None:
    """The number of groups depends on the number of charges alone, and is small against it."""
    found = [groups(n) for n in range(1, 30000, 7)]
    assert sorted(found) == found
    assert all(1 <= g <= 32 for g in found)
    assert all(g <= -(-n // TILE) for n, g in zip(range(1, 30000, 7), found, strict=True))
    assert SMALL <= TILE < THREADED


@pytest.mark.parametrize("n", [512, 600, 1000, 2000, 5000, 10000, 20000])
@pytest.mark.parametrize("threads", [1, 2, 4])
def test_tiles_are_dealt_evenly(n: int, threads: int) -> None:
    """Every column once, and any thread's run of neighbouring groups has its share of the pairs.

    No thread has more than 1/8 above the mean, save where a single column is more than that.
    """
    group, pairs = dealt(n)
    assert set(group) <= set(range(groups(n)))
    share = np.bincount(group, weights=pairs, minlength=groups(n))
    assert pairs.sum() == share.sum()
    of_threads = share.reshape(threads, -1).sum(axis=1)
    mean = pairs.sum() / threads
    assert of_threads.max() <= max(1.125 * mean, mean + pairs.max())
    if n >= 2000 and threads == 2:
        assert of_threads.max() <= 1.03 * mean
