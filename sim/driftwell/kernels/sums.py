"""Sums in a fixed order, with the rounding carried along.

Accounts add a small amount every step, millions of times; Neumaier's variant of Kahan summation
keeps the sum's error near one rounding whatever the count.

References
----------
A. Neumaier, Z. Angew. Math. Mech. 54 (1974) 39, algorithm IV (from memory).
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels.compiled import kernel


@kernel
def add_compensated(total: np.ndarray, carry: np.ndarray, k: int, amount: float) -> None:
    """Add `amount` to ``total[k]``, keeping what rounding drops in ``carry[k]``.

    The value of the account is ``total[k] + carry[k]``.
    """
    before = total[k]
    after = before + amount
    if abs(before) >= abs(amount):
        carry[k] += (before - after) + amount
    else:
        carry[k] += (amount - after) + before
    total[k] = after
