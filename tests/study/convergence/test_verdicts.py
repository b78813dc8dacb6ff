"""All errors of an answer together, and the verdict."""

from __future__ import annotations

import math

import pytest

from driftwell.answers.answer import Answer
from driftwell.study.convergence.chance import Chance
from driftwell.study.convergence.differences import AxisError, nothing_told
from driftwell.study.convergence.verdict import Convergence

STEP = AxisError(0.04, "richardson", "Richardson", 2.0)
WILD = AxisError(0.04, "difference", "difference", asymptotic=False)
SEEDS = AxisError(0.5, "scatter", "scatter of 4 seeds")


def row(
    chance: float = 0.03,
    value: float = 10.0,
    ask: str = "rms-size",
    random: bool = True,
    **axes: AxisError,
) -> Convergence:
    answer = Answer("size", ask, value, "m", None, "")
    return Convergence(answer, axes, Chance(chance, "sampling"), random)


def test_chance_counts_once_and_axes_add_in_quadrature() -> None:
    found = row(step=STEP, seeds=SEEDS, weight=AxisError(0.12, "bound", "below"))
    assert 0.13 == pytest.approx(found.combined, rel=1e-12, abs=0.0)


@pytest.mark.parametrize(
    ("tolerance", "verdict"),
    [(0.0051, "converged"), (0.0049, "dominated by the step"), (None, "dominated by the step")],
)
def test_the_tolerance_is_part_of_the_value(tolerance: float | None, verdict: str) -> None:
    assert verdict == row(step=STEP).verdict(tolerance)


def test_the_tolerance_of_a_fraction_is_part_of_the_whole() -> None:
    small = row(0.005, 0.001, "fraction-left")
    assert "converged" == small.verdict(0.01)
    assert "dominated by chance" == row(0.005, 0.001).verdict(0.01)


def test_differences_that_do_not_shrink_are_told_where_they_matter() -> None:
    assert "not in the asymptotic range of the step" == row(step=WILD).verdict(0.01)
    assert "converged" == row(step=WILD).verdict(0.05)
    assert "dominated by chance" == row(1.0, step=WILD).verdict(None)


def test_what_is_not_known_is_no_convergence() -> None:
    assert "no value" == row(value=math.nan).verdict(0.01)
    assert "not answered in all runs" == row(step=nothing_told(2, 3)).verdict(0.9)
    assert "its error by chance is unknown" == row(math.nan, step=STEP).verdict(0.9)
    assert "converged" == row(math.nan, random=False, step=STEP).verdict(0.9)


def test_an_answer_without_any_error_is_exact() -> None:
    assert "exact" == row(math.nan, random=False).verdict(None)
    assert "converged" == row(0.0, value=0.0).verdict(0.01)


def test_a_bound_that_dominates_asks_for_seeds() -> None:
    found = row(step=AxisError(0.4, "bound", "below the noise: < 0.4"))
    assert "dominated by the step, a bound that more seeds lower" == found.verdict(0.01)
