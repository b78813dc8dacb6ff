"""What the tree knows of its cells, against their charges."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.tree.cells import AMOUNT, COUNT, NET, REACH, SPREAD, SQUARES, STRENGTH, X
from driftwell.tree.expansions import BasisType
from tests.tree.grown import PLACEMENTS, SETTINGS, Grown, example, grown, uniform
from tests.tree.plain import full_moments, moments

ROUNDING = 1e-13
EVERY_PLACEMENT = pytest.mark.parametrize("name", PLACEMENTS)


def distances(found: Grown, cell: int) -> np.ndarray:
    """Of a cell's charges from its centre, in the tree's units."""
    place = found.place[:, found.charges(cell)] * found.unit
    return np.asarray(np.linalg.norm(place - found.tree.cells[cell, X : X + 3, None], axis=0))


@EVERY_PLACEMENT
def test_no_charge_is_farther_than_its_cells_reach(name: str) -> None:
    """To rounding of its places; a leaf reaches no farther, others not three times as far."""
    found = example(name, 2000)
    for cell in range(found.count):
        away, reach = distances(found, cell), found.tree.cells[cell, REACH]
        assert away.max() <= reach * (1.0 + 1e-14)
        if not found.right(cell):
            centre = np.abs(found.tree.cells[cell, X : X + 3]).sum()
            assert reach <= away.max() * (1.0 + 1e-12) + 1e-14 * centre
        assert reach <= 3.0 * away.max() + 1e-14


@EVERY_PLACEMENT
def test_amounts_of_cells_are_those_of_their_charges(name: str) -> None:
    found = example(name, 2000)
    for cell in range(found.count):
        row, charge = found.tree.cells[cell], found.charge[found.charges(cell)]
        assert charge.size == row[COUNT]
        amount = np.abs(charge).sum()
        assert amount == pytest.approx(row[AMOUNT], rel=1e-13, abs=0.0)
        assert charge.sum() == pytest.approx(row[NET], abs=1e-13 * amount)
        assert (charge**2).sum() == pytest.approx(row[SQUARES], rel=1e-13, abs=0.0)


def test_spreads_are_means_of_high_order() -> None:
    """(mean d^12)^(1/12) in a leaf, half by charge and half by number; above it is bounded."""
    found = example("uniform", 2000)
    for cell in range(found.count):
        spread, away = found.tree.cells[cell, SPREAD], distances(found, cell)
        charge = np.abs(found.charge[found.charges(cell)])
        share = 0.5 * charge / charge.sum() + 0.5 / charge.size
        exact = (share * away**12).sum() ** (1.0 / 12.0)
        assert spread <= found.tree.cells[cell, REACH] * (1.0 + 1e-15)
        if found.right(cell):
            assert exact * (1.0 - 1e-12) <= spread <= 3.0 * exact
        else:
            assert exact == pytest.approx(spread, rel=1e-12, abs=0.0)


@EVERY_PLACEMENT
def test_moments_of_all_cells_are_those_of_their_charges(name: str) -> None:
    """About their own centres, of leaves and of what is put together of them."""
    found = example(name, 1000)
    kind = BasisType(SETTINGS.order, False, True)
    rows = found.tree.moments.reshape(-1)
    length = -(-len(kind.moments) // 8) * 8
    for cell in range(found.count):
        which = found.charges(cell)
        place, charge = found.place[:, which] * found.unit, found.charge[which]
        centre = found.tree.cells[cell, X : X + 3]
        expected = moments(place, charge, centre, SETTINGS.order - 1, softened=False)
        reach = found.tree.cells[cell, REACH]
        for k, n in enumerate(kind.moments):
            size = np.abs(charge).sum() * reach ** sum(n)
            rounding = 1e-16 * max(1.0, np.abs(place).max() / reach) if reach > 0.0 else 0.0
            most = (ROUNDING + 30.0 * rounding) * size + 1e-300  # no digits below
            assert abs(expected[n] - rows[length * cell + k]) <= most, (cell, n)


def test_strengths_are_between_net_charge_and_amount() -> None:
    """All of one sign count fully; of mixed ones as much as their low moments or chance say."""
    one = grown(uniform(2000))
    inner = one.tree.cells[: one.count]
    assert inner[:, AMOUNT] == pytest.approx(inner[:, STRENGTH], rel=1e-12, abs=0.0)
    sign = np.where(np.random.default_rng(5).uniform(size=2000) < 0.5, 1.0, -1.0)
    two = grown(uniform(2000), sign)
    cells = two.tree.cells[: two.count]
    assert (cells[:, STRENGTH] <= cells[:, AMOUNT]).all()
    assert (cells[:, STRENGTH] >= np.abs(cells[:, NET]) * (1.0 - 1e-15)).all()
    assert (cells[:, STRENGTH] >= np.sqrt(cells[:, SQUARES]) * (1.0 - 1e-15)).all()
    assert cells[0, STRENGTH] < 0.3 * cells[0, AMOUNT]


def test_a_lasting_dipole_counts() -> None:
    """Positive charges on one side, negative on the other: net charge and chance say too little."""
    place = uniform(2000)
    found = grown(place, np.sign(place[0]))
    row = found.tree.cells[0]
    centre = row[X : X + 3]
    full = full_moments(place * found.unit, found.charge, centre, 1)
    dipole = np.linalg.norm([full[1, 0, 0], full[0, 1, 0], full[0, 0, 1]])
    assert row[STRENGTH] >= 0.999 * dipole / row[SPREAD]
    assert row[STRENGTH] > 3.0 * np.sqrt(row[SQUARES])
