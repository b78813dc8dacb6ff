"""Sums that carry their rounding, against exactly rounded ones."""

from __future__ import annotations

import math
from collections.abc import Iterable

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from driftwell.kernels.sums import add_compensated

ROUNDING = 2.0**-53
AMOUNTS = st.lists(st.floats(-1e100, 1e100), max_size=60)


def compensated(amounts: Iterable[float], k: int = 0, accounts: int = 1) -> float:
    """The account `k` after all amounts were added to it."""
    total, carry = np.zeros(accounts), np.zeros(accounts)
    for amount in amounts:
        add_compensated(total, carry, k, amount)
    others = np.delete(np.stack([total, carry]), k, axis=1)
    assert (others == 0.0).all()
    return float(total[k] + carry[k])


@given(AMOUNTS)
@example([1.0, 1e100, 1.0, -1e100])
def test_the_error_is_one_rounding_and_a_second_order_part(amounts: list[float]) -> None:
    """|error| <= u |sum| + n^2 u^2 sum of sizes: A. Neumaier, Z. Angew. Math. Mech. 54 (1974) 39.

    The bound is quoted from memory; 2 u and a factor 2 more are allowed. `math.fsum` rounds once.
    """
    exact = math.fsum(amounts)
    size = math.fsum(map(abs, amounts))
    bound = 2.0 * ROUNDING * abs(exact) + 2.0 * (len(amounts) * ROUNDING) ** 2 * size
    assert abs(exact - compensated(amounts)) <= bound


def test_the_classical_case_that_plain_and_kahan_sums_lose() -> None:
    """1 + 1e100 + 1 - 1e100 is 2."""
    assert 2.0 == compensated([1.0, 1e100, 1.0, -1e100])
    assert 2.0 != sum([1.0, 1e100, 1.0, -1e100][:3]) - 1e100


def test_many_small_amounts_do_not_wear_off() -> None:
    """30 000 tenths upon a large amount: exact to one rounding, where a plain sum is not."""
    amounts = [1e9, *[0.1] * 30_000]
    assert math.fsum(amounts) == pytest.approx(compensated(amounts), rel=ROUNDING, abs=0.0)
    plain = float(np.cumsum(amounts)[-1])
    assert abs(plain - math.fsum(amounts)) > 100 * ROUNDING * plain


def test_each_account_is_its_own() -> None:
    """Amounts go to the account named, and to no other."""
    assert 6.0 == compensated([1.0, 2.0, 3.0], k=2, accounts=5)
