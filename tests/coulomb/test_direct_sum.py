"""The direct sum against Coulomb's law written out, and what it must keep whatever the charges.

The plain double sum in extended precision is the reference: J. D. Jackson, Classical
Electrodynamics, 3rd ed. (1998), eq. 1.5; softening by S. J. Aarseth, Mon. Not. R. Astron. Soc. 126
(1963) 223 (from memory).
"""

from __future__ import annotations

from typing import Any, NamedTuple

import mpmath
import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.direct import (
    SMALL,
    direct_field,
    direct_sum,
    mixed_field,
    potentials,
    threaded_direct_field,
    threaded_mixed_field,
    threaded_potentials,
    workspace,
)

Floats = NDArray[np.float64]

COUNTS = [1, 2, 4, 5, 8, 9, 24, 25, 40, 63, 64, 65, 72, 127, 128, 129, 500, 511, 512, 513, 1000]
ROUNDING = 1e-14
"""Of the sum of the terms' sizes: a sum of 1000 terms in any order errs by less."""
ROUGH = 3e-8
"""What the mixed sum may err by in each term."""


class Terms(NamedTuple):
    """What is summed for each charge, and the sum of the terms' sizes.

    field : (3, n) V/m; field_size : (n,); potential : (n,) V; potential_size : (n,)
    """

    field: Floats
    field_size: Floats
    potential: Floats
    potential_size: Floats


def written_out(place: Floats, charge: Floats, softening: float = 0.0) -> Terms:
    """Every pair's term in extended precision."""
    exact = place.astype(np.longdouble)
    apart = exact[:, :, None] - exact[:, None, :]
    square = (apart**2).sum(axis=0) + np.longdouble(softening) ** 2
    np.fill_diagonal(square, 1.0)
    each = np.longdouble(COULOMB_CONSTANT) * charge[None, :] / np.sqrt(square)
    np.fill_diagonal(each, 0.0)
    push = each / square * apart
    return Terms(
        push.sum(axis=2).astype(np.float64),
        np.sqrt((push**2).sum(axis=0)).sum(axis=1).astype(np.float64),
        each.sum(axis=1).astype(np.float64),
        np.abs(each).sum(axis=1).astype(np.float64),
    )


def field(
    place: Floats, charge: Floats, softening: float = 0.0, summed: Any = direct_field
) -> Floats:
    """The field (3, n) of the product, on one thread."""
    found = np.full_like(place, np.nan)
    work = workspace(charge.size)
    work[:] = np.nan
    summed(place, charge, softening**2, COULOMB_CONSTANT, work, found)
    return found


def potential(place: Floats, charge: Floats, softening: float = 0.0) -> Floats:
    """The potential (n,) of the product, on one thread."""
    found = np.full_like(charge, np.nan)
    potentials(place, charge, softening**2, COULOMB_CONSTANT, found)
    return found


def cloud(n: int, size: float = 1.0) -> tuple[Floats, Floats]:
    """Places and unequal charges of both signs."""
    random = np.random.default_rng(n)
    return random.uniform(-size, size, (3, n)), random.uniform(-3.0, 5.0, n)


@pytest.mark.parametrize("softening", [0.0, 0.1])
@pytest.mark.parametrize("n", COUNTS)
def test_field_and_potential_are_the_sums_written_out(n: int, softening: float) -> None:
    """On both sides of every tile's edge, for each charge alone."""
    place, charge = cloud(n)
    expected = written_out(place, charge, softening)
    wrong = np.abs(expected.field - field(place, charge, softening)).max(axis=0)
    assert (wrong <= ROUNDING * expected.field_size).all()
    wrong = np.abs(expected.potential - potential(place, charge, softening))
    assert (wrong <= ROUNDING * expected.potential_size).all()


@pytest.mark.parametrize("softening", [0.0, 0.1])
@pytest.mark.parametrize("n", [65, 128, 500, 513, 1000])
def test_the_mixed_sum_errs_by_its_measure_in_each_term(n: int, softening: float) -> None:
    """And by no less than the measure of processors that do not estimate: something is saved."""
    place, charge = cloud(n)
    expected = written_out(place, charge, softening)
    found = field(place, charge, softening, mixed_field)
    wrong = np.abs(expected.field - found).max(axis=0)
    assert (wrong <= ROUGH * expected.field_size).all()
    assert wrong.max() > 1e-13 * expected.field_size.max()


@pytest.mark.parametrize("n", [1, 2, 8, 64])
def test_few_charges_are_summed_in_double_even_where_mixed_is_asked_for(n: int) -> None:
    """Nothing would be saved."""
    place, charge = cloud(n)
    assert (field(place, charge) == field(place, charge, 0.0, direct_sum(n, 1, mixed=True))).all()


def test_no_charges_have_no_field() -> None:
    """All may be lost; nothing is touched."""
    nothing, work = np.empty((3, 0)), workspace(0)
    work[:] = 7.0
    direct_sum(0, 1)(nothing, nothing[0], 0.0, COULOMB_CONSTANT, work, nothing)
    potentials(nothing, nothing[0], 0.0, COULOMB_CONSTANT, nothing[0])
    assert (7.0 == work).all()


@pytest.mark.parametrize("size", [1e-12, 1e-6, 1.0, 1e3])
@pytest.mark.parametrize("n", [2, 64, 130])
def test_the_sums_hold_from_picometres_to_kilometres(n: int, size: float) -> None:
    """A charge's own term must not swamp those of far ones, nor a guard meant for it."""
    place, charge = cloud(n, size)
    expected = written_out(place, charge)
    wrong = np.abs(expected.field - field(place, charge)).max(axis=0)
    assert (wrong <= ROUNDING * expected.field_size).all()
    wrong = np.abs(expected.potential - potential(place, charge))
    assert (wrong <= ROUNDING * expected.potential_size).all()


@pytest.mark.parametrize("n", [2, 64, 130])
def test_softening_far_below_the_distances_leaves_the_potential_of_others_exact(n: int) -> None:
    """At e = 1 nm the own term is 1e9 times those of charges a metre away: it must never enter."""
    place, charge = cloud(n)
    expected = written_out(place, charge, 1e-9)
    wrong = np.abs(expected.potential - potential(place, charge, 1e-9))
    assert (wrong <= ROUNDING * expected.potential_size).all()


def test_three_charges_by_fifty_digits() -> None:
    """The reference itself is right: Jackson's eq. 1.5 by mpmath, term by term."""
    place = np.array([[0.1, -0.2, 1.7], [0.0, 0.3, -0.4], [2.0, 1e-3, -0.5]]).T.copy()
    charge = np.array([1.0, -2.5, 4.0])
    with mpmath.workdps(50):
        for i in range(3):
            total, level = mpmath.matrix(3, 1), mpmath.mpf(0)
            for j in {0, 1, 2} - {i}:
                apart = mpmath.matrix([mpmath.mpf(a) - mpmath.mpf(b) for a, b in place[:, [i, j]]])
                r = mpmath.norm(apart)
                total += mpmath.mpf(COULOMB_CONSTANT) * mpmath.mpf(charge[j]) / r**3 * apart
                level += mpmath.mpf(COULOMB_CONSTANT) * mpmath.mpf(charge[j]) / r
            expected = [float(component) for component in total]
            scale = float(np.abs(expected).max())
            assert expected == pytest.approx(field(place, charge)[:, i], abs=1e-15 * scale)
            assert float(level) == pytest.approx(potential(place, charge)[i], rel=2e-15, abs=0.0)


@pytest.mark.parametrize("n", [3, 64, 100, 600])
def test_a_charge_of_zero_is_felt_by_nobody(n: int) -> None:
    """The field of a cloud of which a third was lost is that of the rest alone."""
    place, charge = cloud(n)
    charge[::3] = 0.0
    left = charge != 0.0
    alone = written_out(np.ascontiguousarray(place[:, left]), charge[left])
    wrong = np.abs(alone.field - field(place, charge)[:, left]).max(axis=0)
    assert (wrong <= ROUNDING * alone.field_size).all()
    wrong = np.abs(alone.potential - potential(place, charge)[left])
    assert (wrong <= ROUNDING * alone.potential_size).all()


@pytest.mark.parametrize("softening", [0.0, 0.1])
@pytest.mark.parametrize(
    ("n", "first", "second"), [(2, 0, 1), (64, 0, 63), (200, 3, 5), (200, 3, 150)]
)
def test_two_charges_at_one_place_push_nowhere_and_leave_the_rest_alone(
    n: int, first: int, second: int, softening: float
) -> None:
    """In one tile and in two; without softening they are left out of each other's potential."""
    place, charge = cloud(n)
    place[:, second] = place[:, first]
    found, level = field(place, charge, softening), potential(place, charge, softening)
    others = charge.copy()
    others[second] = 0.0
    expected = written_out(place + 0.0, others, softening if softening else 1e-30)
    wrong = np.abs(expected.field - found).max(axis=0)[first]
    assert wrong <= ROUNDING * expected.field_size[first] + 0.0
    mutual = COULOMB_CONSTANT * charge[second] / softening if softening else 0.0
    wrong = abs(expected.potential[first] + mutual - level[first])
    assert wrong <= ROUNDING * (expected.potential_size[first] + abs(mutual))
    assert np.isfinite(found).all()
    assert np.isfinite(level).all()


@pytest.mark.parametrize(
    ("n", "summed"),
    [
        *((n, direct_field) for n in (2, 4, 8, 24, 64, 65, 129, 600)),
        *((n, mixed_field) for n in (65, 129, 600)),
    ],
)
def test_forces_cancel_pair_by_pair(n: int, summed: Any) -> None:
    """Newton's third law: |sum F| / sum |F| at rounding, like and unlike charges.

    1e-15 where both halves of a pair come from one product; a sum of n forces rounds by about
    sqrt(n) 1e-16, so a few 1e-16 is what there is to expect.
    """
    place, charge = cloud(n)
    for q in (charge, np.ones(n)):
        force = q * field(place, q, 0.0, summed)
        residual = np.linalg.norm(force.sum(axis=1)) / np.linalg.norm(force, axis=0).sum()
        assert residual <= 2e-15
    if n == 2:
        force = field(place, np.ones(2))
        assert (force[:, 0] == -force[:, 1]).all()


@pytest.mark.parametrize("summed", [direct_field, mixed_field])
@pytest.mark.parametrize(("first", "second"), [(0, 1), (3, 60), (5, 70), (64, 120), (100, 128)])
def test_two_charges_alone_push_each_other_alike(first: int, second: int, summed: Any) -> None:
    """Whichever place in a tile they have: their forces are each other's negative to a rounding.

    Of unequal charges the last product of each force is rounded apart; of equal ones none.
    """
    place, _ = cloud(129)
    for charges, most in (((1.0, 1.0), 0.0), ((2.7, -0.9), 4e-16)):
        charge = np.zeros(129)
        charge[first], charge[second] = charges
        force = charge * field(place, charge, 0.0, summed)
        sizes = np.abs(force[:, first])
        assert (sizes > 0.0).all()
        assert (np.abs(force[:, first] + force[:, second]) <= most * sizes).all()


@pytest.mark.parametrize("n", [40, 64, 200, 600])
def test_the_order_of_the_charges_does_not_matter(n: int) -> None:
    """Any permutation gives each charge the same field and potential, to rounding."""
    place, charge = cloud(n)
    order = np.random.default_rng(n).permutation(n)
    size = written_out(place, charge)
    mixed = field(np.ascontiguousarray(place[:, order]), charge[order])
    wrong = np.abs(field(place, charge)[:, order] - mixed).max(axis=0)
    assert (wrong <= ROUNDING * size.field_size[order]).all()
    mixed = potential(np.ascontiguousarray(place[:, order]), charge[order])
    assert (
        np.abs(potential(place, charge)[order] - mixed) <= ROUNDING * size.potential_size[order]
    ).all()


@pytest.mark.parametrize("softening", [0.0, 0.1])
def test_the_field_is_minus_the_gradient_of_the_potential(softening: float) -> None:
    """By central differences of a probe's potential, with a fourth-order formula: 1e-9 of it."""
    place, charge = cloud(70)
    h = 1e-3
    nearest = np.linalg.norm(place[:, 1:] - place[:, :1], axis=0).min()
    assert nearest > 30 * h
    slope = np.zeros(3)
    for axis in range(3):
        for number, weight in ((-2, 1.0), (-1, -8.0), (1, 8.0), (2, -1.0)):
            moved = place.copy()
            moved[axis, 0] += number * h
            slope[axis] += weight * potential(moved, charge, softening)[0] / (12.0 * h)
    found = field(place, charge, softening)[:, 0]
    assert -slope == pytest.approx(found, abs=1e-7 * np.linalg.norm(found))


@pytest.mark.parametrize("n", [512, 513, 1000, 2100, 4096, 4099])
def test_threads_change_no_bit(n: int) -> None:
    """Field and potential of the threaded kernels are those of the serial ones, bit for bit."""
    place, charge = cloud(n)
    serial = field(place, charge)
    threaded = np.full_like(place, np.nan)
    threaded_direct_field(place, charge, 0.0, COULOMB_CONSTANT, workspace(n), threaded)
    assert (serial == threaded).all()
    threaded_mixed_field(place, charge, 0.0, COULOMB_CONSTANT, workspace(n), threaded)
    assert (field(place, charge, 0.0, mixed_field) == threaded).all()
    assert (serial != threaded).any()
    level = np.full(n, np.nan)
    threaded_potentials(place, charge, 0.0, COULOMB_CONSTANT, level)
    assert (potential(place, charge) == level).all()


@pytest.mark.parametrize(("n", "threads"), [(10, 1), (100, 2), (600, 1), (600, 2)])
def test_the_sum_handed_to_the_time_loop_is_the_same_sum(n: int, threads: int) -> None:
    """Whichever kernel serves a number of charges and threads."""
    place, charge = cloud(n)
    found = np.full_like(place, np.nan)
    direct_sum(n, threads)(place, charge, 0.1**2, COULOMB_CONSTANT, workspace(n), found)
    assert (field(place, charge, 0.1) == found).all()
    if n > SMALL:
        rough = direct_sum(n, threads, mixed=True)
        assert (field(place, charge, 0.1, mixed_field) == field(place, charge, 0.1, rough)).all()


@pytest.mark.parametrize("n", [1, 2, 8, 9, 24, 30, 64, 100, 600])
def test_a_place_that_is_no_number_makes_every_field_and_potential_none(n: int) -> None:
    """Of the charge that is nowhere, all of the field; of all others at least the part along."""
    place, charge = cloud(n)
    place[1, n // 2] = np.nan
    sums = [direct_field] if n <= SMALL else [direct_field, mixed_field]
    for summed in sums:
        found = field(place, charge, 0.0, summed)
        assert np.isnan(found[1]).all()
        assert n == 1 or np.isnan(found).all()
    if n > 1:
        others = np.arange(n) != n // 2
        assert np.isnan(potential(place, charge)[others]).all()


@pytest.mark.parametrize("n", [2, 64, 100, 600])
def test_charges_nearer_than_any_two_can_be_push_with_finite_force(n: int) -> None:
    """1e-100 m apart and unsoftened: the guard against their own place is theirs as well."""
    place, charge = cloud(n)
    place[:, 0] = 0.0
    place[:, n - 1] = [1e-100, 0.0, 0.0]
    assert np.isfinite(field(place, charge)).all()


@pytest.mark.parametrize("n", [2, 64, 100, 600])
@pytest.mark.parametrize("bad", [np.nan, np.inf])
def test_what_is_not_a_number_is_not_hidden(n: int, bad: float) -> None:
    """A place that is no number makes every field and potential one, whatever the flags."""
    place, charge = cloud(n)
    place[1, n // 2] = bad
    assert np.isnan(field(place, charge)[1]).any()
    assert not np.isfinite(field(place, charge)[:, n // 2]).all()
    if np.isnan(bad):
        assert np.isnan(potential(place, charge)).all()
