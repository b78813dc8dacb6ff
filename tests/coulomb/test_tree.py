"""The tree sum against the direct one: its promised accuracy, its balances, and its limits.

The rms relative error is that of tests/pair_sums.py. The direct sum is held against Coulomb's law
written out elsewhere (test_direct_sum.py).
"""

from __future__ import annotations

import os
import subprocess
import sys
from functools import cache
from itertools import pairwise
from pathlib import Path

import numpy as np
import pytest

import driftwell
from driftwell.coulomb.tree import (
    TreeSettings,
    settings_for,
    tightened,
    tree_sum,
    tree_workspace,
)
from driftwell.kernels.threads import on_threads
from tests.pair_sums import Floats, direct, rms_error, tree
from tests.tree.clouds import CLOUDS

COUNT = 8000
EVERY_CLOUD = pytest.mark.parametrize("shape", CLOUDS)
DIRECT = direct(threads=2)
SALT = 8.0
"""How much more a lattice errs whose next neighbours' pushes cancel."""


@cache
def reference(shape: str, n: int = COUNT) -> Floats:
    """The direct field (3, n) of a cloud."""
    place, charge = CLOUDS[shape](n)
    return DIRECT.field(place, charge, 0.0, 1.0)


@cache
def found(shape: str, accuracy: float, n: int = COUNT) -> Floats:
    """The tree's field (3, n) of a cloud, as a run has it."""
    place, charge = CLOUDS[shape](n)
    return tree(accuracy).field(place, charge, 0.0, 1.0)


def summed(
    settings: TreeSettings,
    place: Floats,
    charge: Floats,
    softening: float = 0.0,
    rows: int = 3,
    mixed: bool = False,
) -> Floats:
    """What the tree finds, (rows, n), in a new work space on two threads."""
    out = np.full((rows, charge.size), np.nan)
    with on_threads(2) as given:
        work = tree_workspace(charge.size, given, settings, softening > 0.0, mixed)
        tree_sum()(place, charge, softening**2, 1.0, work, out)
    return out


def test_more_accuracy_is_more_work() -> None:
    """Order and tolerance follow the accuracy one way only, within an order strictly."""
    wanted = 10.0 ** np.arange(-8.0, -0.99, 0.25)
    chosen = [settings_for(float(accuracy)) for accuracy in wanted]
    for fine, coarse in pairwise(chosen):
        assert fine.order >= coarse.order
        assert fine.order > coarse.order or fine.tolerance < coarse.tolerance
    assert all(3 <= each.order <= 14 for each in chosen)
    assert all(each.leaf % 16 == 0 for each in chosen)
    assert chosen[0].order > chosen[-1].order


@pytest.mark.parametrize("accuracy", [1e-7, 1e-5, 1e-4, 1e-3, 1e-2])
def test_tightened_settings_are_those_of_a_smaller_error(accuracy: float) -> None:
    """By the factor asked for; 1 changes nothing. Loosened ones keep their order."""
    base = settings_for(accuracy)
    for factor in (1.0, 2.0, 4.0):
        expected, got = settings_for(accuracy / factor), tightened(base, factor)
        assert (expected.order, expected.leaf) == (got.order, got.leaf)
        assert expected.tolerance == pytest.approx(got.tolerance, rel=1e-9, abs=0.0)
    loose = tightened(base, 0.3)
    assert (base.order, base.leaf) == (loose.order, loose.leaf)
    assert loose.tolerance > base.tolerance
    back = tightened(loose, 1.0 / 0.3)
    assert base.order == back.order
    assert base.tolerance == pytest.approx(back.tolerance, rel=1e-9, abs=0.0)


@pytest.mark.parametrize("accuracy", [1e-2, 1e-3, 1e-4, 1e-5, 5e-7])
@EVERY_CLOUD
def test_the_error_is_below_the_accuracy_asked_for(shape: str, accuracy: float) -> None:
    """And not much: what is not needed costs time.

    Clusters of many sizes are an exception: the field in the densest decides what counts, and
    the densest are summed pair by pair. So is salt, whose charges feel much less than their
    nearest neighbour's push: it errs up to eight times as much, which a run notices and mends.
    """
    error = rms_error(reference(shape), found(shape, accuracy))
    assert error <= (SALT if shape == "salt" else 1.0) * accuracy
    if shape != "clustered":
        assert error >= accuracy / 300.0


def test_tightening_mends_even_salt() -> None:
    """By the factor by which it erred too much, and a little."""
    place, charge = CLOUDS["salt"](COUNT)
    factor = rms_error(reference("salt"), found("salt", 1e-3)) / 1e-3
    settings = tightened(settings_for(1e-3), 1.5 * factor)
    again = summed(settings, place, charge, mixed=True)
    assert factor > 1.0
    assert rms_error(reference("salt"), again) <= 1e-3


def test_the_tree_converges_to_the_direct_sum() -> None:
    """In steps of a hundred, the last of the twelfth order with some of it still far."""
    n = 3000
    errors = [
        rms_error(reference("even signs", n), found("even signs", accuracy, n))
        for accuracy in (1e-2, 1e-4, 5e-7, 1e-8)
    ]
    assert errors == sorted(errors, reverse=True)
    assert 0.0 < errors[-1] <= 1e-8
    loose = TreeSettings(12, 16, 1e-3)
    place, charge = CLOUDS["even signs"](n)
    error = rms_error(reference("even signs", n), summed(loose, place, charge))
    assert 1e-9 < error < 1e-4


@pytest.mark.parametrize("accuracy", [1e-2, 1e-3, 1e-4, 1e-5, 5e-7])
@EVERY_CLOUD
def test_all_forces_cancel_and_their_torques_nearly(shape: str, accuracy: float) -> None:
    """Forces to rounding. Torques, about the middle, as far as the forces are exact."""
    place, charge = CLOUDS[shape](COUNT)
    force = charge * found(shape, accuracy)
    assert np.linalg.norm(force.sum(axis=1)) <= 1e-13 * np.linalg.norm(force, axis=0).sum()
    arm = place - place.mean(axis=1, keepdims=True)
    torque = np.cross(arm, force, axis=0)
    left = np.linalg.norm(torque.sum(axis=1)) / np.linalg.norm(torque, axis=0).sum()
    assert left <= 0.1 * accuracy


@pytest.mark.parametrize("accuracy", [1e-4, 5e-7])
@pytest.mark.parametrize("shape", ["gaussian", "shell", "needle", "even signs", "unequal"])
def test_half_the_sum_of_charge_times_potential_is_the_energy(shape: str, accuracy: float) -> None:
    """Of the direct sum, whose potentials it has one by one as well."""
    place, charge = CLOUDS[shape](COUNT)
    assert DIRECT.potential is not None
    expected = DIRECT.potential(place, charge, 0.0, 1.0)
    settings = settings_for(accuracy)
    level = summed(settings, place, charge, rows=4)[3]
    size = float(np.abs(charge) @ np.abs(expected))
    assert float(charge @ expected) == pytest.approx(float(charge @ level), abs=accuracy * size)
    assert 0.0 < rms_error(expected, level) <= 3.0 * accuracy


@pytest.mark.parametrize("shape", ["gaussian", "even signs"])
def test_the_field_found_with_potentials_is_the_field_found_without(shape: str) -> None:
    """To rounding, where neither is mixed; far within the accuracy."""
    place, charge = CLOUDS[shape](COUNT)
    settings = settings_for(5e-7)
    with_levels = summed(settings, place, charge, rows=4)
    without = summed(settings, place, charge)
    assert rms_error(without, with_levels[:3]) <= 1e-12
    assert rms_error(reference(shape), without) > 1e-9


@pytest.mark.parametrize("softening", [1e-9, 1e-3, 0.05, 1.0, 30.0])
@pytest.mark.parametrize("shape", ["gaussian", "needle", "even signs"])
def test_softened_sums_are_as_accurate(shape: str, softening: float) -> None:
    """From next to nothing over the spacing to far more than the cloud: fields and potentials."""
    place, charge = CLOUDS[shape](5000)
    settings = settings_for(1e-4)
    expected = DIRECT.field(place, charge, softening, 1.0)
    alone = summed(settings, place, charge, softening, mixed=True)
    both = summed(settings, place, charge, softening, rows=4)
    assert 0.0 < rms_error(expected, alone) <= 1e-4
    assert rms_error(alone, both[:3]) <= 1e-7
    assert DIRECT.potential is not None
    levels = DIRECT.potential(place, charge, softening, 1.0)
    assert rms_error(levels, both[3]) <= 3e-4
    force = charge * both[:3]
    assert np.linalg.norm(force.sum(axis=1)) <= 1e-13 * np.linalg.norm(force, axis=0).sum()


@pytest.mark.parametrize("at", [(0.3, -1e-3, 7.0), (0.0, 0.0, 0.0), (0.5, 0.0, -2.0)])
def test_softened_charges_at_one_place_have_each_others_level(at: tuple[float, ...]) -> None:
    """Q / e from each of the others there, and no push; also where cells have no extent at all."""
    place = np.tile(np.array(at)[:, None], 100)
    charge = np.random.default_rng(1).uniform(0.5, 2.0, 100)
    settings = settings_for(1e-4)
    for q in (charge, np.ones(100)):
        both = summed(settings, place, q, 0.25, rows=4)
        assert np.abs(both[:3]).max() <= 1e-12
        assert (q.sum() - q) / 0.25 == pytest.approx(both[3], rel=1e-13, abs=0.0)


def test_the_order_of_the_charges_changes_roundings_only() -> None:
    """In a tree whose cells are the same whatever the order."""
    place, charge = CLOUDS["even signs"](COUNT)
    order = np.random.default_rng(2).permutation(COUNT)
    settings = settings_for(5e-7)
    other = summed(settings, np.ascontiguousarray(place[:, order]), charge[order])
    expected = found("even signs", 5e-7)[:, order]
    assert rms_error(expected, other) <= 1e-11
    assert rms_error(reference("even signs")[:, order], other) > 1e-9


@pytest.mark.parametrize("accuracy", [1e-2, 1e-4])
def test_one_and_two_charges(accuracy: float) -> None:
    """One feels nothing; two are Coulomb's law, in mixed precision to 3e-8."""
    one = tree(accuracy).field(np.ones((3, 1)), np.ones(1), 0.0, 9.0)
    assert (one == 0.0).all()
    place = np.array([[1.0, 1.0], [2.0, 2.0], [0.0, 3.0]])
    two = tree(accuracy).field(place, np.array([2.0, -4.0]), 0.0, 9.0)
    assert np.array([[0.0, 0.0], [0.0, 0.0], [4.0, 2.0]]) == pytest.approx(two, rel=3e-8, abs=0.0)


def test_no_charges_have_no_field() -> None:
    """All may be lost."""
    assert (3, 0) == tree(1e-4).field(np.empty((3, 0)), np.empty(0), 0.0, 1.0).shape


@pytest.mark.parametrize("accuracy", [1e-2, 1e-4, 5e-7])
@pytest.mark.parametrize("far", [1e3, 1e6, 1e9, 1e12])
def test_a_lone_charge_far_away_spoils_nobody(accuracy: float, far: float) -> None:
    """The cloud is a point beside the distance to it, and is as accurate nevertheless."""
    place, charge = CLOUDS["gaussian"](3000)
    place[:, 1234] = [far, -0.3 * far, 0.0]
    here = np.arange(3000) != 1234
    expected = DIRECT.field(place, charge, 0.0, 1.0)
    got = tree(accuracy).field(place, charge, 0.0, 1.0)
    assert rms_error(expected[:, here], got[:, here]) <= accuracy
    there = np.linalg.norm(got[:, 1234] - expected[:, 1234])
    assert there <= accuracy * np.linalg.norm(expected[:, 1234])


@pytest.mark.parametrize("far", [1e12, 1e15])
def test_high_orders_do_not_overflow_beside_a_lone_charge_far_away(far: float) -> None:
    """Of the tenth and twelfth order: derivatives grow with that power of 1 over the distance."""
    place, charge = CLOUDS["gaussian"](6000)
    place[:, 1234] = [far, -0.3 * far, 0.0]
    expected = DIRECT.field(place, charge, 0.0, 1.0)
    here = np.arange(6000) != 1234
    for settings in (settings_for(5e-7), TreeSettings(12, 32, 1e-4)):
        got = summed(settings, place, charge)
        assert rms_error(expected[:, here], got[:, here]) <= 1e-5


@pytest.mark.parametrize("unit", [1e-100, 1.602176634e-19, 1e30])
def test_charges_in_any_unit(unit: float) -> None:
    """Where several are at one place as well: what overflows there is no push."""
    place, charge = CLOUDS["gaussian"](1000)
    place[:, ::10] = place[:, 1::10]
    expected = tree(1e-4).field(place, charge, 0.0, 1.0)
    got = tree(1e-4).field(place, charge * unit, 0.0, 1.0)
    assert rms_error(expected, got / unit) <= 1e-12


def test_the_promise_holds_for_the_time_loops_own_numbers() -> None:
    """Elementary charges within micrometres, in SI units."""
    place, charge = CLOUDS["ball"](COUNT)
    got = tree(1e-4).field(place * 1e-6, charge * 1.602176634e-19, 0.0, 8.9875517862e9)
    expected = reference("ball") * 1e12 * 1.602176634e-19 * 8.9875517862e9
    assert rms_error(expected, got) <= 1e-4


MEMORY = """
import sys
import numpy as np
from driftwell.coulomb.tree import settings_for, tree_sum, tree_workspace
settings = settings_for(1e-4)
summed = tree_sum()

def pages(name):
    with open("/proc/self/status") as status:
        return next(1024 * int(line.split()[1]) for line in status if line.startswith(name))

few = np.random.default_rng(1).normal(size=(3, 2000))
work = tree_workspace(2000, 1, settings, mixed=True)
summed(few, np.ones(2000), 0.0, 1.0, work, np.empty_like(few))
n = int(sys.argv[1])
place, out, charge = np.random.default_rng(1).normal(size=(3, n)), np.zeros((3, n)), np.ones(n)
found = [pages('VmHWM')]
work = tree_workspace(n, 1, settings, mixed=True)
found += [pages('VmHWM')]
for _ in range(2):
    summed(place, charge, 0.0, 1.0, work, out)
    found += [pages('VmHWM'), pages('VmRSS')]
print(*found)
"""


@pytest.mark.skipif(not sys.platform.startswith("linux"), reason="reads Linux's account of pages")
def test_the_work_space_takes_at_most_five_hundred_bytes_a_charge() -> None:
    """Pages are touched as they are used; a second sum takes no more, nor gives any back."""
    n = 200_000
    sources = Path(driftwell.__file__).resolve().parent.parent
    done = subprocess.run(
        [sys.executable, "-c", MEMORY, str(n)],
        env={**os.environ, "PYTHONPATH": str(sources)},
        capture_output=True,
        text=True,
        check=False,
    )
    assert done.returncode == 0, done.stderr
    before, laid_out, first, then, second, last = (int(each) for each in done.stdout.split())
    assert laid_out - before <= 1 << 20
    assert 100 * n <= first - before <= 500 * n
    assert second - first <= 1 << 20
    assert abs(last - then) <= 1 << 20
