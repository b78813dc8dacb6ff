"""A pair sum that breaks its promise is told, mended from then on, and told of at the end."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import numpy as np
import pytest

from driftwell.constants import COULOMB_CONSTANT, ELEMENTARY_CHARGE
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.promise import GOAL, SHARE, SLOWNESS, TOLD, Breach, Broken, Promise, Scene
from driftwell.coulomb.sampled_error import SAMPLE
from driftwell.coulomb.summation import Summation, manner_of
from tests.inexact import SIZE, Inexact, inexact  # noqa: F401

N = 150
PLACE = np.random.default_rng(4).normal(size=(3, N)) * SIZE / np.sqrt(3.0)
CHARGE = np.full(N, 1e3 * ELEMENTARY_CHARGE)
OFTEN = 1e6
"""Sums between two looks, more than enough for the next look to be affordable."""


def watched(accuracy: float = 1e-4, method: str = "tree") -> tuple[Summation, Promise]:
    form = Coulomb(method=method, accuracy=accuracy)
    return Summation(form, N, 1), Promise(accuracy)


def scene(
    summation: Summation, time: float, size: float = 1.0, sums: float | None = None, **changes: Any
) -> Scene:
    """The cloud swollen to `size` at a time, s, with its field; as many sums as milliseconds."""
    place = PLACE * size
    field = np.empty((3, N))
    summation.field(place, CHARGE, field)
    whole = Scene(
        time,
        round(1e3 * time),
        OFTEN * time if sums is None else sums,
        place,
        CHARGE,
        np.arange(N),
        field,
    )
    return replace(whole, **changes)


def error_of(size: float = 1.0) -> float:
    """The rms relative force error the inexact sum has for a tolerance of 1."""
    form = Coulomb(method="tree")
    tolerant = Summation(form, N, 1)
    assert tolerant.settings is not None
    seen = scene(Summation(form, N, 1, replace(tolerant.settings, tolerance=1e-3)), 0.0, size)
    exact = np.empty((3, N))
    Summation(Coulomb(method="direct"), N, 1).field(seen.position, CHARGE, exact)
    part = ((seen.field - exact) ** 2).sum(axis=0) / (exact**2).sum(axis=0)
    return float(np.sqrt(part.mean())) / 1e-3


def test_a_promise_that_is_kept_is_measured_and_said_once(inexact: Inexact) -> None:  # noqa: F811
    inexact.tolerance = 1e-5
    summation, promise = watched()
    expected = 1e-5 * error_of()
    after, error, told = promise.look(summation, scene(summation, 0.0))
    assert after is summation
    # a sample of all charges: the definition, with a floor that touches hardly any of them
    assert expected == pytest.approx(error, rel=0.05, abs=0.0)
    (sentence,) = told
    assert f"at {N} charges: it errs by {error:.1e} of the force (rms), 99 %" in sentence
    after, again, told = promise.look(after, scene(summation, 1.0))
    assert [] == told
    assert error == pytest.approx(again, rel=1e-9, abs=0.0)
    assert promise.broken(99.0) is None
    assert error == promise.error(after)


def test_a_sum_far_better_than_asked_is_loosened_at_the_start_and_only_then(
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance, inexact.loosens = 1e-7, 1.0
    summation, promise = watched()
    seen = scene(summation, 0.0)
    after, error, told = promise.look(summation, seen)
    assert 1 == len(told)
    assert GOAL * 1e-4 == pytest.approx(error, rel=0.05, abs=0.0)
    field = np.empty((3, N))
    after.field(seen.position, CHARGE, field)
    assert field.tobytes() == seen.field.tobytes()
    shrunk, smaller, _ = promise.look(after, scene(after, 1.0, 0.1))
    assert shrunk is after
    assert smaller < 0.1 * error


def test_a_sum_that_would_err_too_much_when_loosened_stays_as_it_is(
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance, inexact.loosens = 1e-7, 1.5
    summation, promise = watched()
    seen = scene(summation, 0.0)
    before = seen.field.tobytes()
    after, error, _ = promise.look(summation, seen)
    assert after is summation
    assert 1e-7 * error_of() == pytest.approx(error, rel=0.05, abs=0.0)
    assert before == seen.field.tobytes()


def test_a_promise_broken_at_the_start_is_mended_before_anything_was_computed(
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance = 1e-2
    summation, promise = watched()
    seen = scene(summation, 0.0)
    after, error, told = promise.look(summation, seen)
    assert after is not summation
    assert 0.0 < error <= 1e-4
    (sentence,) = told
    assert sentence.startswith("At the start the Coulomb sum errs by ")
    assert "more than coulomb.accuracy = 0.0001" in sentence
    assert f"now errs by {error:.1e}." in sentence
    assert promise.broken(99.0) is None
    # the field at hand is that of the mended sum
    expected = np.empty((3, N))
    after.field(seen.position, CHARGE, expected)
    assert expected.tobytes() == seen.field.tobytes()


def test_a_promise_broken_on_the_way_is_told_mended_and_kept_from_then_on(
    inexact: Inexact,  # noqa: F811
) -> None:
    inexact.tolerance = 1e-5
    summation, promise = watched()
    summation, kept, _ = promise.look(summation, scene(summation, 0.0))
    _, still, told = promise.look(summation, scene(summation, 1.0, 2.0))
    assert kept < still <= 1e-4
    assert [] == told
    broken_at = scene(summation, 3.0, 10.0)
    mended, worst, told = promise.look(summation, broken_at)
    assert 1e-5 * error_of(10.0) == pytest.approx(worst, rel=0.1, abs=0.0)
    assert worst > 1e-4
    (sentence,) = told
    assert sentence.startswith(f"At t = 3 s the Coulomb sum errs by {worst:.1e}")
    assert "the last look that found it good was at t = 1 s" in sentence
    assert "tightened from here on" in sentence
    assert mended.settings is not None
    assert mended.settings.tolerance < 1e-5
    field = np.empty((3, N))
    mended.field(broken_at.position, CHARGE, field)
    assert field.tobytes() == broken_at.field.tobytes()
    last, error, told = promise.look(mended, scene(mended, 4.0, 10.0))
    assert last is mended
    assert error <= 1e-4
    assert [] == told
    assert Broken(1e-4, worst, 2.0, unmended=False) == promise.broken(99.0)


def test_a_sum_that_cannot_be_mended_is_told_with_what_to_do(inexact: Inexact) -> None:  # noqa: F811
    inexact.tolerance, inexact.best = 1e-2, 5e-3
    summation, promise = watched()
    told: list[str] = []
    for second in range(10):
        summation, error, said = promise.look(summation, scene(summation, float(second)))
        told += said
        assert error > 1e-4
    assert TOLD == len(told)
    assert 'use coulomb.method = "direct"' in told[0]
    assert "told at the end" in told[-1]
    # from the last look to the end it was not kept either
    broken = promise.broken(9.5)
    assert broken is not None
    assert (9.5, True) == (broken.seconds, broken.unmended)
    assert 5e-3 * error_of() == pytest.approx(broken.worst, rel=0.1, abs=0.0)


def test_the_last_record_is_always_looked_at(inexact: Inexact) -> None:  # noqa: F811
    """However little the run has done since the first look."""
    inexact.tolerance = 1e-5
    for last in (False, True):
        summation, promise = watched()
        summation, kept, _ = promise.look(summation, scene(summation, 0.0))
        swollen = scene(summation, 1.0, 9.0, sums=3.0, last=last)
        _, error, told = promise.look(summation, swollen)
        assert (error > 1e-4) == last == bool(told)
        assert last or error == kept


def test_an_exact_sum_is_not_measured_and_has_no_error() -> None:
    for method in ("direct", "off"):
        summation, promise = watched(method=method)
        spoiled = scene(summation, 0.0)
        spoiled.field[:] *= 1.5
        assert (summation, 0.0, []) == promise.look(summation, spoiled)
        assert promise.broken(99.0) is None


def test_mixed_precision_falls_back_to_full_where_it_errs_too_much() -> None:
    form = Coulomb(method="direct", precision="mixed", accuracy=1e-6)
    summation, promise = Summation(form, N, 1), Promise(1e-6)
    seen = scene(summation, 0.0)
    seen.field[:] *= 1.0 + 1e-5
    after, error, told = promise.look(summation, seen)
    assert after.exact
    assert error < 1e-12
    assert 1 == len(told)
    assert 0.0 == promise.error(after)


def test_measuring_costs_no_more_than_its_share(inexact: Inexact) -> None:  # noqa: F811
    """Beyond the first look: one pair of the sample counts double."""
    inexact.tolerance = 1e-6
    summation, promise = watched()
    looks = 0
    steps = 2000
    for step in range(steps):
        before = promise.state()["watch"][2]
        summation, _, _ = promise.look(
            summation, scene(summation, 1e-3 * step, sums=float(step), step=step)
        )
        looks += int(promise.state()["watch"][2] > before)
    cost = SLOWNESS * min(SAMPLE, N) * N
    most = SHARE * steps * summation.pairs / cost
    assert 5 < most
    assert most - 1.0 <= looks <= most + 1.0


def test_lost_charges_are_no_error(inexact: Inexact) -> None:  # noqa: F811
    """Down to none at all."""
    inexact.tolerance = 1e-5
    summation, promise = watched()
    for k, left in enumerate((N, 20, 2, 1, 0)):
        charge = np.where(np.arange(N) < left, CHARGE, 0.0)
        field = np.empty((3, N))
        summation.field(PLACE, charge, field)
        seen = replace(scene(summation, float(k)), charge=charge, field=field)
        summation, error, _ = promise.look(summation, seen)
        assert error <= 1e-4
    assert promise.broken(99.0) is None


def test_a_watch_goes_on_from_its_state(inexact: Inexact) -> None:  # noqa: F811
    """Whatever the point at which it is taken up: the same looks, errors and breaches."""
    inexact.tolerance = 1e-5

    def gone_on(taken_up: int | None) -> tuple[list[float], list[Breach], Broken | None]:
        summation, promise = watched()
        errors = []
        for k, size in enumerate((1.0, 1.0, 9.0, 9.0, 30.0, 30.0)):
            if k == taken_up:
                state = summation.manner.state() | promise.state()
                form = Coulomb(method="tree", accuracy=1e-4)
                summation = Summation(form, N, 1, manner=manner_of(state))
                promise = Promise(1e-4, state)
            summation, error, _ = promise.look(summation, scene(summation, float(k), size))
            errors.append(error)
        return errors, promise.breaches, promise.broken(5.5)

    unbroken = gone_on(None)
    assert 2 == len(unbroken[1])
    for k in range(6):
        assert unbroken == gone_on(k)


def test_constant_and_softening_are_those_of_the_sum() -> None:
    summation = Summation(Coulomb(method="direct", softening="2 um"), N, 1)
    assert COULOMB_CONSTANT == summation.constant
    assert 4e-12 == pytest.approx(summation.softening2, rel=1e-12, abs=0.0)
