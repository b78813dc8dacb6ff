"""What is done with a pair of cells.

A pair goes by expansions where these converge, R > reach_A + reach_B, and where their error is
small against the field F that is there (scale.py): with amounts S (measure.py) and
spreads s,

    S_B ((s_A + s_B) / R)^p / (R - reach_A - reach_B)^2 <= tolerance F_A                       (1)

and the same with A and B exchanged. Far cells of a large cloud give a small part of the force, and
need few digits. If A is larger than B, the cells around B err alike, since A's expansion is what
cuts them short: S_B counts (s_A / s_B)^3 times then, and cutting B up does not help A.

Where a leaf and a smaller cell of more charges fail (1), the leaf's charges can be taken one by
one, with no extent of their own: an outer leaf that is wide, and sees a dense centre, needs it.

References
----------
W. Dehnen, Comput. Astrophys. Cosmol. 1 (2014) 1, sec. 3: errors relative to the field; there with
multipoles' powers and a factor fitted, here with a mean radius and the distance at its nearest.
"""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import (
    LanesType,
    fused,
    inverse_root,
    lanes,
    larger,
    load,
    positive,
    store,
    where_above,
)
from driftwell.tree.cells import BATCH, REACH, RIGHT, SPREAD, STRENGTH, WANT, Away, X, Y, Z

NEAR, FAR, BY_CHARGE, NOTHING = 0.0, 1.0, 2.0, 3.0
"""Cut one of them, or sum over charges; expansions; a leaf's charges one by one; no force."""
_LARGER = 1.25
_CLOSEST2 = tuple(10.0 ** (-560.0 / (2 * order + 1)) for order in range(16))
"""Squared distance, by order, below which derivatives, of order -(2 p + 1), are no numbers."""


@inner_kernel
def verdicts(
    row: np.ndarray, others: np.ndarray, away: Away, order: int, out_verdicts: np.ndarray
) -> None:
    """What is done with a cell A and images of eight others, given its row and theirs in lanes."""
    one, none = lanes(1.0), lanes(0.0)
    x = (lanes(row[X]) - load(others, BATCH * X)) - lanes(away[0])
    y = (lanes(row[Y]) - load(others, BATCH * Y)) - lanes(away[1])
    z = (lanes(row[Z]) - load(others, BATCH * Z)) - lanes(away[2])
    reach_a, reach_b = lanes(row[REACH]), load(others, BATCH * REACH)
    spread_a, spread_b = lanes(row[SPREAD]), load(others, BATCH * SPREAD)
    at_a = load(others, BATCH * STRENGTH) * lanes(row[WANT])
    at_b = lanes(row[STRENGTH]) * load(others, BATCH * WANT)
    square = fused(x, x, fused(y, y, z * z))
    reach = reach_a + reach_b
    inverse = inverse_root(positive(square))
    apart = square * inverse
    gap = apart - reach
    allowed = gap * gap
    power = _power((spread_a + spread_b) * inverse, order)
    fails_a = _exceeds(at_a * power, allowed, spread_a, spread_b)
    fails_b = _exceeds(at_b * power, allowed, spread_b, spread_a)
    separate = where_above(square, larger(reach * reach, lanes(_CLOSEST2[order])), one)
    far = separate - where_above(fails_a + fails_b, none, separate)
    leaf_a, leaf_b = _is_zero(lanes(row[RIGHT])), _is_zero(load(others, BATCH * RIGHT))
    either = leaf_a * (one - leaf_b) + leaf_b * (one - leaf_a)
    leaf_reach = leaf_a * reach_a + leaf_b * reach_b
    leaf_spread = leaf_a * spread_a + leaf_b * spread_b
    inner_spread = (one - leaf_a) * spread_a + (one - leaf_b) * spread_b
    either = where_above(leaf_spread, inner_spread, either)
    wanted = larger(at_a, at_b) * _power(inner_spread, order)
    borne = allowed * _power(apart - leaf_reach, order)
    by_charge = either * separate * (one - far) * (one - where_above(wanted, borne, one))
    nothing = _is_zero(square) * _is_zero(reach)
    found = far + lanes(BY_CHARGE) * by_charge + lanes(NOTHING) * nothing
    store(out_verdicts, 0, found)


@inner_kernel
def _exceeds(error: LanesType, allowed: LanesType, own: LanesType, other: LanesType) -> LanesType:
    """1 where the error at a cell of spread `own` is too large, crowding counted, else 0."""
    one = lanes(1.0)
    wider = where_above(own, lanes(_LARGER) * other, one)
    crowded = wider * own * own * own + (one - wider)
    room = wider * other * other * other + (one - wider)
    exceeds: LanesType = where_above(error * crowded, allowed * room, one)
    return exceeds


@inner_kernel
def _is_zero(a: LanesType) -> LanesType:
    """1 where a number that is not negative is 0, else 0."""
    one: LanesType = lanes(1.0)
    above: LanesType = where_above(a, lanes(0.0), one)
    return one - above


@inner_kernel
def _power(a: LanesType, order: int) -> LanesType:
    square = a * a
    power = square
    for _ in range(order // 2 - 1):
        power = power * square
    return power * a if order % 2 == 1 else power
