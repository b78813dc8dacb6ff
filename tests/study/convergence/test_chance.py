"""Sampling errors held against the scatter of seeds."""

from __future__ import annotations

import math

import numpy as np
import pytest

from driftwell.answers.answer import Answer
from driftwell.study.convergence.chance import chance_of


def answer(error: float | None, ask: str = "rms-size") -> Answer:
    return Answer("size", ask, 1.0, "m", error, "")


def test_without_seeds_the_sampling_error_stands_or_none_is_known() -> None:
    assert 0.1 == chance_of(answer(0.1), [1.0]).error
    assert math.isnan(chance_of(answer(None), [1.0]).error)


def test_seeds_that_scatter_as_said_bear_the_sampling_error_out() -> None:
    found = chance_of(answer(0.1), [1.0, 1.1, 0.9, 1.0])
    assert (0.1, "sampling, borne out by 4 seeds") == (found.error, found.how)


@pytest.mark.parametrize("size", [0.005, 0.5])
def test_seeds_that_scatter_far_less_or_more_contradict_it(size: float) -> None:
    found = chance_of(answer(0.1), [1.0, 1.0 + size, 1.0 - size, 1.0])
    assert size * math.sqrt(2.0 / 3.0) * 1.197 == pytest.approx(found.error, rel=1e-9, abs=0.0)
    assert "scatter of 4 seeds" == found.how


def test_seeds_stand_where_the_run_knows_no_error_of_its_own() -> None:
    assert "scatter of 4 seeds" == chance_of(answer(None), [1.0, 1.2, 0.9, 1.0]).how


def test_no_loss_in_all_seeds_does_not_make_a_fraction_certain() -> None:
    assert 0.02 == chance_of(answer(0.02, "fraction-left"), [1.0, 1.0, 1.0, 1.0]).error
    few = [1.0, 1.0, 1.0, 0.999]
    assert 0.02 == chance_of(answer(0.02, "fraction-left"), few).error
    assert 0.02 == chance_of(answer(0.02), [1.0, 1.0, 1.0]).error


def test_a_true_sampling_error_is_contradicted_once_in_twenty() -> None:
    draws = np.random.default_rng(7).normal(size=(4000, 4))
    found = [chance_of(answer(1.0), row).how for row in draws]
    against = found.count("scatter of 4 seeds") / len(found)
    assert 0.035 < against < 0.065
