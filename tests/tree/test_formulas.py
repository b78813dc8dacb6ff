"""The formulas of the expansions on plain numbers, against mpmath and the charges themselves."""

from __future__ import annotations

import math
from typing import Any

import mpmath
import numpy as np
import pytest

from driftwell.tree import formulas
from driftwell.tree.multi_index import cartesian, factorial, harmonic, plus, traded
from tests.tree.plain import (
    PLAIN,
    Floats,
    charges_about,
    derivatives,
    field,
    full_moments,
    local,
    moments,
    power,
)

KINDS = pytest.mark.parametrize("softening", [0.0, 0.7])
PLACE = np.array([1.3, -0.6, 0.9])
ROUNDING = 1e-13


def test_there_are_as_many_indices_as_there_should_be() -> None:
    """All of a total order n, (n + 1)(n + 2)/2; 2 n + 1 of them have at most one turn in z."""
    for order in range(9):
        every, kept = cartesian(order), harmonic(order)
        assert len(set(every)) == len(every) == math.comb(order + 3, 3)
        assert len(set(kept)) == len(kept) == (order + 1) ** 2
        assert sorted(every, key=sum) == every
        assert {sum(index) for index in every} == set(range(order + 1))
    assert ((3, 2, 0), (1, 4, 0)) == traded((1, 2, 2))
    assert 2 * 6 * 24 == factorial((2, 3, 4))


@KINDS
@pytest.mark.parametrize("place", [PLACE, np.array([0.0, 0.0, -0.8]), np.array([-2.0, 0.3, 0.0])])
def test_derivatives_are_those_found_by_differencing(softening: float, place: Floats) -> None:
    """Of 1/r and (r^2 + e^2)^(-1/2) up to the sixth, with fifty digits: to 1e-12 of the largest."""
    found = derivatives(place, softening, 6)
    with mpmath.workdps(50):

        def root(x: Any, y: Any, z: Any) -> Any:
            return 1 / mpmath.sqrt(x * x + y * y + z * z + mpmath.mpf(softening) ** 2)

        at = tuple(mpmath.mpf(float(each)) for each in place)
        expected = {n: float(mpmath.diff(root, at, n)) for n in cartesian(6)}
    for total in range(7):
        size = max(abs(value) for n, value in expected.items() if sum(n) == total)
        for n, value in expected.items():
            if sum(n) == total:
                assert value == pytest.approx(found[n], abs=1e-12 * size), n


def test_derivatives_of_the_twelfth_order_satisfy_laplace() -> None:
    """Also those that were not traded for others: along each axis the Legendre value 12! / r^13."""
    for axis in range(3):
        at = np.zeros(3)
        at[axis] = 1.7
        index = tuple(12 if each == axis else 0 for each in range(3))
        found = derivatives(at, 0.0, 12)[index]  # type: ignore[index]
        expected = math.factorial(12) / 1.7**13
        assert expected == pytest.approx(found, rel=1e-12, abs=0.0)


def test_monomials_are_powers_over_factorials() -> None:
    made = formulas.monomials(PLAIN, list(PLACE), 7, 2.5)
    assert set(cartesian(7)) == set(made)
    for n, value in made.items():
        assert 2.5 * float(power(PLACE, n)) == pytest.approx(value, rel=1e-14, abs=0.0), n


def test_folded_moments_act_far_away_as_the_full_ones() -> None:
    """Far potential of random moments, whatever charges they come from, or none."""
    random = np.random.default_rng(3)
    for order in (1, 2, 3, 5, 7):
        full = {n: float(random.normal()) for n in cartesian(order)}
        kept = formulas.folded(PLAIN, full, order)
        assert set(harmonic(order)) == set(kept)
        d = derivatives(PLACE, 0.0, order)
        expected = sum(full[n] * d[n] for n in full)
        size = sum(abs(full[n] * d[n]) for n in full)
        assert expected == pytest.approx(
            sum(kept[n] * d[n] for n in kept), abs=ROUNDING * size, rel=0.0
        )


@KINDS
def test_moments_give_the_potential_of_the_charges(softening: float) -> None:
    """Each order more is nearer, by the ratio of extent to distance; at the tenth to 1e-5."""
    place, charge = charges_about(4)
    at = 3.0 * PLACE
    apart = at[:, None] - place
    expected = (charge / np.sqrt((apart**2).sum(axis=0) + softening**2)).sum()
    errors = []
    for order in (2, 6, 10):
        m = moments(place, charge, np.zeros(3), order, softening > 0.0)
        d = derivatives(at, softening, order)
        errors.append(abs(sum(m[n] * d[n] for n in m) / expected - 1.0))
    assert errors[0] < 1e-2
    assert errors[2] < 1e-6
    assert errors[1] < 0.05 * errors[0]
    assert errors[2] < 0.05 * errors[1]


@KINDS
def test_moments_about_a_new_centre_are_those_of_the_charges(softening: float) -> None:
    """Exact whatever the order: a shift of moments drops nothing."""
    softened = softening > 0.0
    place, charge = charges_about(5)
    old, new = np.array([0.1, -0.2, 0.05]), np.array([-0.6, 0.3, 0.8])
    for order in (1, 2, 5):
        shifted = formulas.shifted_moments(
            PLAIN, moments(place, charge, old, order, softened), list(new - old), order, softened
        )
        expected = moments(place, charge, new, order, softened)
        assert set(expected) == set(shifted)
        size = sum(abs(each) for each in full_moments(place, np.abs(charge), new, order).values())
        for n, value in expected.items():
            assert value == pytest.approx(shifted[n], abs=ROUNDING * size), n


@KINDS
def test_a_local_expansion_about_a_new_centre_is_the_same_field(softening: float) -> None:
    """Exact whatever the order: it is a polynomial, harmonic where nothing is softened."""
    softened = softening > 0.0
    random = np.random.default_rng(6)
    for order in (2, 5):
        own = {n: float(random.normal()) for n in formulas.indices(order, softened)}
        to, at = np.array([0.3, -0.2, 0.4]), np.array([-0.1, 0.5, 0.2])
        shifted = dict(formulas.shifted_locals(PLAIN, own, list(to), order, softened))
        assert set(own) == set(shifted)
        expected = field(own, to + at, softened, order)
        found = field(shifted, at, softened, order)
        assert expected[:3] == pytest.approx(found[:3], rel=1e-12, abs=0.0)
        assert expected[3] == pytest.approx(found[3], rel=1e-12, abs=0.0)


@KINDS
def test_the_field_is_minus_the_slope_of_the_potential(softening: float) -> None:
    """By central differences of a polynomial of third degree, which are exact to the fifth."""
    softened = softening > 0.0
    random = np.random.default_rng(7)
    own = {n: float(random.normal()) for n in formulas.indices(4, softened)}
    at, h = np.array([0.2, -0.3, 0.1]), 0.25
    found = field(own, at, softened, 4)
    for axis in range(3):
        step = np.zeros(3)
        step[axis] = h
        slope = sum(
            weight * field(own, at + k * step, softened, 4)[3]
            for k, weight in ((-2, 1.0), (-1, -8.0), (1, 8.0), (2, -1.0))
        ) / (12.0 * h)
        assert -slope == pytest.approx(found[axis], rel=1e-12, abs=0.0)


def test_an_expansion_of_far_charges_has_their_field_and_potential() -> None:
    """Softened or not, nearer with each order."""
    for softening in (0.0, 0.7):
        place, charge = charges_about(8)
        centre, at = 4.0 * PLACE, np.array([0.2, -0.3, 0.1])
        apart = (centre + at)[:, None] - place
        square = (apart**2).sum(axis=0) + softening**2
        expected = np.append(
            (charge * apart / square**1.5).sum(axis=1), (charge / square**0.5).sum()
        )
        errors = []
        for order in (3, 6, 9):
            m = moments(place, charge, np.zeros(3), order - 1, softening > 0.0)
            found = field(local(m, centre, softening, order), at, softening > 0.0, order)
            errors.append(np.linalg.norm(found - expected) / np.linalg.norm(expected))
        assert errors[0] < 1e-2
        assert errors[1] < 0.1 * errors[0]
        assert errors[2] < 0.1 * errors[1]


@KINDS
@pytest.mark.parametrize("order", [3, 4, 7])
def test_two_cells_push_each_other_alike(softening: float, order: int) -> None:
    """Total forces of charges so near that expansions err by percents; they cancel to rounding."""
    softened = softening > 0.0
    a, qa = charges_about(9)
    b, qb = charges_about(10, count=30)
    apart = np.array([0.9, 0.5, -0.4])  # from b's centre to a's

    def forces(sink: Floats, charge: Floats, source: Floats, other: Floats, x: Floats) -> Floats:
        m = moments(source, other, np.zeros(3), order - 1, softened)
        heard = local(m, x, softening, order)
        each = [
            q * field(heard, at, softened, order)[:3] for at, q in zip(sink.T, charge, strict=True)
        ]
        return np.array(each)

    on_a, on_b = forces(a, qa, b, qb, apart), forces(b, qb, a, qa, -apart)
    size = np.linalg.norm(on_a, axis=1).sum() + np.linalg.norm(on_b, axis=1).sum()
    left = np.linalg.norm(on_a.sum(axis=0) + on_b.sum(axis=0))
    assert left <= 1e-14 * size
    gap = a[:, :, None] + apart[:, None, None] - b[:, None, :]
    pairs = qa[:, None] * qb * gap / ((gap**2).sum(axis=0) + softening**2) ** 1.5
    wrong = np.linalg.norm(on_a.sum(axis=0) - pairs.sum(axis=(1, 2)))
    assert wrong > 1e-9 * size  # the forces themselves are not exact: that they cancel says more
    assert wrong < 0.3 * size


@KINDS
def test_terms_are_added_to_what_is_there(softening: float) -> None:
    """And only those asked for."""
    softened = softening > 0.0
    place, charge = charges_about(11)
    m = moments(place, charge, np.zeros(3), 3, softened)
    d = derivatives(3.0 * PLACE, softening, 4)
    start = {(1, 0, 0): 5.0, (0, 0, 1): -2.0}
    made = formulas.local_terms(PLAIN, m, d, 4, softened, start)
    assert start.keys() == made.keys()
    for n, value in start.items():
        expected = value + sum(m[k] * d[plus(n, k)] for k in m)
        assert expected == pytest.approx(made[n], rel=1e-13, abs=0.0)
