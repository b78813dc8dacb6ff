"""Blocks of many charges, and the sums over each of them.

MANY charges and more are passed through in blocks, on all threads. How they are cut follows from
their number alone; each block has its own row of sums, and the rows are added in order: so the bits
do not depend on the number of threads.
"""

from __future__ import annotations

from typing import Any

import numpy as np

from driftwell.kernels import inner_kernel

MANY = 16384
"""From this many charges on, passes go block by block."""
BLOCK = 2048
"""Charges of one block: all that a step keeps of them, 500 kB, stays in a core's own cache."""
LEAP = 32
"""Whole steps that a part of a block may take before the next part does, at most."""

POWER = 0
"""W, of the drives."""
ENERGY = 1
"""J, in the fields."""
FORCE = 2
"""6 entries: force and torque of the fields."""
BEFORE = 8
"""6 entries: momentum and angular momentum before a drift."""
AFTER = 14
"""The same, after it."""
INDUCED = 20
"""J, work of induced fields."""
CROSSED = 21
"""How many charges are on another side of a surface than at the beginning of the step."""
SUMS = 24
"""Entries of a row: three cache lines, so that no two threads write to one."""


def blocks(n: int, few_too: bool = False) -> int:
    """Number of blocks of `n` charges; none where they are few, unless these are cut too."""
    return -(-n // BLOCK) if n >= MANY or few_too else 0


@inner_kernel
def added(block_sums: np.ndarray, k: int) -> float:
    """The sum over all blocks, in order; block_sums : (blocks, SUMS)."""
    total = 0.0
    for b in range(block_sums.shape[0]):
        total += block_sums[b, k]
    return total


@inner_kernel
def six_added(block_sums: np.ndarray, k: int) -> tuple[float, float, float, float, float, float]:
    """Six sums over all blocks, from entry `k` on."""
    return (
        added(block_sums, k),
        added(block_sums, k + 1),
        added(block_sums, k + 2),
        added(block_sums, k + 3),
        added(block_sums, k + 4),
        added(block_sums, k + 5),
    )


@inner_kernel
def put_six(
    sums: tuple[float, float, float, float, float, float], k: int, out_row: np.ndarray
) -> None:
    """Write six sums into a block's row, from entry `k` on."""
    out_row[k], out_row[k + 1], out_row[k + 2] = sums[0], sums[1], sums[2]
    out_row[k + 3], out_row[k + 4], out_row[k + 5] = sums[3], sums[4], sums[5]


@inner_kernel
def add_six(sums: tuple[float, float, float, float, float, float], k: int, row: np.ndarray) -> None:
    """Add six sums to a block's row, from entry `k` on."""
    row[k] += sums[0]
    row[k + 1] += sums[1]
    row[k + 2] += sums[2]
    row[k + 3] += sums[3]
    row[k + 4] += sums[4]
    row[k + 5] += sums[5]


@inner_kernel
def unsigned(i: int) -> Any:
    """`i` without a sign: loops need not ask at each charge whether it counts from the end."""
    return np.uint64(i)


@inner_kernel
def signed(i: int) -> Any:
    """`i` with a sign, as all others are: a parallel loop's index has none."""
    return np.int64(i)
