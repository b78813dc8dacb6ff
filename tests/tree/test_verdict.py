"""What is done with a pair of cells does not depend on who asks, and keeps to its rule."""

from __future__ import annotations

from typing import Any

import numpy as np
import pytest

from driftwell.kernels import kernel
from driftwell.tree.cells import BATCH, CELL, REACH, RIGHT, SPREAD, STRENGTH, WANT, X
from driftwell.tree.verdict import BY_CHARGE, FAR, NEAR, NOTHING, verdicts

Floats = Any


@kernel
def _verdicts(row: Any, others: Any, order: int, out: Any) -> None:
    verdicts(row, others, (0.0, 0.0, 0.0), order, out)


def verdict(a: Floats, b: Floats, order: int = 6) -> float:
    """Of A about B, by the eight-fold kernel."""
    others, out = np.repeat(b, BATCH), np.empty(BATCH)
    _verdicts(a, others, order, out)
    assert (out[0] == out).all()
    return float(out[0])


def cell(
    x: float,
    reach: float = 0.1,
    spread: float | None = None,
    strength: float = 1.0,
    want: float = 1e3,
    leaf: bool = False,
) -> Floats:
    """A cell's row, on the x axis."""
    row = np.zeros(CELL)
    row[X], row[REACH], row[SPREAD] = x, reach, 0.8 * reach if spread is None else spread
    row[STRENGTH], row[WANT], row[RIGHT] = strength, want, 0.0 if leaf else 7.0
    return row


def any_cell(random: np.random.Generator) -> Floats:
    """A cell of any size and kind within 1 of the origin."""
    row = np.zeros(CELL)
    row[X : X + 3] = random.uniform(-1.0, 1.0, 3)
    row[REACH] = 10.0 ** random.uniform(-3.0, 0.0) * (random.uniform() > 0.1)
    row[SPREAD] = random.uniform(0.3, 1.0) * row[REACH]
    row[STRENGTH] = 10.0 ** random.uniform(-2.0, 2.0) * (random.uniform() > 0.1)
    row[WANT] = 10.0 ** random.uniform(0.0, 5.0)
    row[RIGHT] = 7.0 * (random.uniform() > 0.4)
    return row


@pytest.mark.parametrize("order", [3, 4, 6, 9, 12])
def test_both_cells_of_a_pair_are_told_the_same(order: int) -> None:
    """Else one would push without being pushed; each verdict comes up."""
    random = np.random.default_rng(order)
    found = []
    for _ in range(4000):
        a, b = any_cell(random), any_cell(random)
        if random.uniform() < 0.05:
            b[: REACH + 1] = a[: REACH + 1] = [*a[X : X + 3], 0.0]
        found.append(verdict(a, b, order))
        assert found[-1] == verdict(b, a, order)
    assert {NEAR, FAR, BY_CHARGE, NOTHING} == set(found)
    assert min(found.count(each) for each in (NEAR, FAR, BY_CHARGE, NOTHING)) > 20


@pytest.mark.parametrize("order", [3, 4, 6, 9])
def test_the_error_allowed_decides(order: int) -> None:
    """S ((s + s) / R)^p / (R - reach - reach)^2 against 1 / want, to a billionth on both sides."""
    error = 2.0 * (0.16 / 1.5) ** order / 1.3**2
    for slack, expected in ((1.0 - 1e-9, FAR), (1.0 + 1e-9, NEAR)):
        want = slack / error
        asked = verdict(cell(0.0, want=want), cell(1.5, strength=2.0, want=1e-9), order)
        assert expected == asked


def test_cells_that_touch_are_never_far() -> None:
    """However little their error would matter."""
    assert NEAR == verdict(cell(0.0, want=0.0), cell(0.2, want=0.0))
    assert NEAR == verdict(cell(0.0, want=0.0), cell(0.0, want=0.0))
    assert FAR == verdict(cell(0.0, want=0.0), cell(0.2001, want=0.0))


def test_a_leaf_whose_extent_alone_is_too_much_is_taken_by_charges() -> None:
    """A wide lone leaf beside a dense centre; two leaves are summed pair by pair."""
    wide = cell(0.0, reach=1.0, want=1e4, leaf=True)
    assert BY_CHARGE == verdict(wide, cell(1.5, reach=0.01))
    assert NEAR == verdict(wide, cell(1.5, reach=0.01, leaf=True))
    assert NEAR == verdict(cell(0.0, reach=1.0, want=1e4), cell(1.5, reach=0.01))


def test_a_larger_cell_does_not_blame_smaller_ones() -> None:
    """What one of eight neighbours errs by, all do: a third power of the sizes' ratio."""
    error = (0.44 / 3.0) ** 6 / (3.0 - 0.55) ** 2
    big, small = (
        cell(0.0, reach=0.5, spread=0.4, want=0.9 / error),
        cell(3.0, reach=0.05, spread=0.04),
    )
    small[WANT] = 1e-9
    assert NEAR == verdict(big, small)
    big[WANT] = 0.9e-3 / error
    assert FAR == verdict(big, small)
    big[WANT] = 1.1e-3 / error
    assert NEAR == verdict(big, small)


def test_charges_at_one_place_do_nothing_to_each_other() -> None:
    """Leaves or not."""
    a, b = cell(0.5, reach=0.0), cell(0.5, reach=0.0, leaf=True)
    assert NOTHING == verdict(a, b) == verdict(b, a)
    assert NOTHING != verdict(a, cell(0.5, reach=1e-9))


def test_what_is_no_number_is_looked_at_pair_by_pair() -> None:
    """It is cut until charges meet charges, and shows."""
    for place in (X, REACH, SPREAD, STRENGTH):
        row = cell(0.0)
        row[place] = np.nan
        assert NEAR == verdict(row, cell(1.5)) == verdict(cell(1.5), row)
