"""How trees are grown: what every tree keeps to, whatever the places."""

from __future__ import annotations

import numpy as np
import pytest

from driftwell.tree.cells import DEEPEST, LEVELS
from tests.tree.grown import PLACEMENTS, Floats, Grown, example, grown, lone, uniform

COUNT = 3000
EVERY_PLACEMENT = pytest.mark.parametrize("name", PLACEMENTS)


def is_a_tree(found: Grown) -> None:
    """Each charge is in one leaf; leaves are full but the last; children part their parent."""
    n, first = found.charge.size, found.tree.first
    assert list(range(n)) == sorted(found.tree.order[:n].tolist())
    leaves = [cell for cell in range(found.count) if not found.right(cell)]
    assert -(-n // found.leaf) == len(leaves)
    assert first[0] == 0
    begins = [int(first[cell]) for cell in leaves]
    assert list(range(0, n, found.leaf)) == begins
    assert n == first[leaves[-1] + 1]
    for cell in range(found.count):
        if found.right(cell):
            left, right = cell + 1, found.right(cell)
            assert first[cell] == first[left]
            assert right == found.last(left) + 1
            assert found.last(right) < found.count
            assert parted(found, left, right)


def parted(found: Grown, left: int, right: int) -> bool:
    """Whether along an axis all of the left cell are before all of the right, or level with one."""
    a = found.place[:, found.charges(left)].max(axis=1)
    b = found.place[:, found.charges(right)].min(axis=1)
    return bool((a <= b).any())


def depth(found: Grown) -> int:
    """Cells on the longest way from the root to a leaf."""
    depths = [0] * found.count
    depths[0] = 1
    for cell in range(found.count):
        if found.right(cell):
            depths[cell + 1] = depths[found.right(cell)] = depths[cell] + 1
    return max(depths)


@EVERY_PLACEMENT
def test_hard_arrangements_make_trees(name: str) -> None:
    is_a_tree(example(name, COUNT))


@EVERY_PLACEMENT
def test_no_way_to_a_leaf_is_too_long(name: str) -> None:
    """Below some depth cells are halved by number, so it ends; before, a cell may lose one leaf."""
    found = example(name, COUNT)
    most = DEEPEST + 1 + int(np.ceil(np.log2(found.count)))
    assert most < LEVELS
    assert depth(found) <= most
    if name == "uniform":
        assert depth(found) <= 3 + np.log2(found.count)


def test_charges_that_crowd_towards_a_point_reach_the_depth_where_numbers_cut() -> None:
    """Thirty-two at each of a thousand powers of two, which halving alone would part one by one."""
    place = np.repeat(np.outer([1.0, 1.0, -1.0], 0.5 ** np.arange(1000.0)), 32, axis=1)
    found = grown(place)
    is_a_tree(found)
    assert DEEPEST < depth(found) <= DEEPEST + 11


@pytest.mark.parametrize("name", ["uniform", "one point", "crowding"])
def test_few_charges_make_trees(name: str) -> None:
    """Of every number to a hundred: on both sides of one leaf, two and three, and of vectors."""
    for n in range(1, 101):
        is_a_tree(grown(PLACEMENTS[name](n)))


def test_leaves_of_other_sizes() -> None:
    for leaf in (16, 48, 64, 128):
        for n in (leaf - 1, leaf, leaf + 1, 2 * leaf, 10 * leaf + 3):
            is_a_tree(grown(uniform(n), leaf=leaf))


def test_many_charges_make_a_tree_that_all_threads_cut() -> None:
    """From 100 000 charges on; in units of 1e-9, one of them a long way off."""
    found = grown(lone(130_001) * 1e-9, threads=2)
    n = found.charge.size
    assert np.isfinite(found.field).all()
    assert list(range(n)) == sorted(found.tree.order[:n].tolist())
    assert depth(found) <= DEEPEST
    for cell in range(0, found.count, 7):
        if found.right(cell):
            assert parted(found, cell + 1, found.right(cell))


@EVERY_PLACEMENT
def test_places_stand_in_the_trees_order_and_units(name: str) -> None:
    """A power of two brings all within 1; behind the last stand its copies without charge."""
    found = example(name, COUNT)
    n, tree = found.charge.size, found.tree
    order = tree.order[:n]
    assert (found.place[:, order] * found.unit == tree.place[:3, :n]).all()
    assert (found.charge[order] == tree.place[3, :n]).all()
    assert 0.5 <= np.abs(tree.place[:3, :n]).max() <= 1.0
    assert (tree.place[:3, n:] == tree.place[:3, n - 1 : n]).all()
    assert (tree.place[3, n:] == 0.0).all()


@EVERY_PLACEMENT
def test_hard_arrangements_have_finite_fields(name: str) -> None:
    assert np.isfinite(example(name, COUNT).field).all()


@pytest.mark.parametrize("bad", [np.nan, np.inf, -np.inf])
@pytest.mark.parametrize("n", [1, 33, 3000])
def test_a_charge_that_is_nowhere_makes_all_fields_none(n: int, bad: float) -> None:
    """And the sum ends."""
    for axis in range(3):
        place = uniform(n)
        place[axis, n // 2] = bad
        assert np.isnan(grown(place).field).all()
    assert np.isnan(grown(np.full((3, n), bad)).field).all()


@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_an_amount_that_is_no_number_is_not_hidden(bad: float) -> None:
    """Everybody but that charge itself feels it; and the sum ends."""
    charge = np.ones(3000)
    charge[1700] = bad
    found = grown(uniform(3000), charge).field
    assert not np.isfinite(np.delete(found, 1700, axis=1)).any()


@pytest.mark.parametrize("size", [1e-100, 1e-30, 1e30, 1e100])
def test_places_of_any_size_make_the_same_tree(size: float) -> None:
    """Rounded, but nearly: what is compared is differences."""
    place: Floats = uniform(2000)
    found = grown(place * size)
    is_a_tree(found)
    assert (example_order(place) == found.tree.order[:2000]).mean() > 0.99


def example_order(place: Floats) -> Floats:
    """The tree's order of places as they are."""
    made: Floats = grown(place).tree.order[: place.shape[1]]
    return made
