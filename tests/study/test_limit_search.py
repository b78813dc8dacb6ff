"""A search finds where a function crosses a threshold, says how sure that is, or why it cannot."""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
import pytest
from scipy.stats import binom

from driftwell.study.crossing import Known, crossing
from driftwell.study.limit_noise import Reading, pooled
from driftwell.study.limit_search import (
    FOUND,
    NO_CROSSING,
    NOT_REACHED,
    RUNS_FAILED,
    SEVERAL,
    TOO_NOISY,
    Search,
    Wanted,
)
from tests.study.sought import asked, searched

Shape = Callable[[float], float]
"""A function that crosses zero at 0."""

SHAPES: dict[str, Shape] = {
    "line": lambda x: 2.0 * x,
    "falling line": lambda x: -1.5 * x,
    "sigmoid": lambda x: math.tanh(x / 0.1) / 2.0,
    "step": lambda x: 0.5 if x >= 0.0 else -0.5,
    "bend": lambda x: max(x, -0.1) * 1.5,
}


def test_intervals_at_95_percent_hold_the_limit_in_95_percent_of_cases() -> None:
    """200 seeds, five shapes in turn, limits anywhere, noise of 0.03 that is told truly."""
    held = 0
    generator = np.random.default_rng(11)
    for seed in range(200):
        shape = list(SHAPES.values())[seed % len(SHAPES)]
        limit = 0.25 + 0.5 * generator.random()
        search = searched(lambda x, f=shape, at=limit: f(x - at), asked(size=0.04), 0.03, seed=seed)
        assert search.verdict is not None
        assert FOUND == search.verdict.word
        assert search.verdict.interval is not None
        low, high = search.verdict.interval
        held += low <= limit <= high
    # At 95 %, fewer than this many of 200 are met once in a thousand times. A step's interval is
    # its whole gap, so that more than 95 % is no fault.
    assert binom.ppf(0.001, 200, 0.95) <= held


def test_intervals_are_no_wider_than_a_line_fitted_with_the_right_law_warrants() -> None:
    """Bounds from both sides: values of a line, of which a fit by least squares knows the place."""
    at = np.linspace(0.0, 1.0, 21)
    error = np.full(at.size, 0.05)
    value = 2.0 * (at - 0.4) + error * np.random.default_rng(3).standard_normal(at.size)
    low, high = crossing(Known(at, value, error), True).interval(0.95)
    # Least squares: variance of the place where the line is zero, at slope 2.
    spread = 0.05 / 2.0 * math.sqrt(1.0 / 21 + (0.4 - 0.5) ** 2 / np.sum((at - 0.5) ** 2))
    assert 0.8 < (high - low) / (2.0 * 1.96 * spread) < 2.0


@pytest.mark.parametrize("name", SHAPES)
def test_answers_without_error_are_closed_in_on_from_both_sides(name: str) -> None:
    shape = SHAPES[name]
    search = searched(lambda x: shape(x - 0.4321), asked(size=0.001))
    verdict = search.verdict
    assert verdict is not None
    assert verdict.interval is not None
    assert verdict.certain
    low, high = verdict.interval
    assert low <= 0.4321 <= high
    assert high - low <= 0.001
    assert verdict.rising is (name != "falling line")
    # A grid of this resolution has 1001 values; division by three each round needs 5 + 2 x 6.
    assert search.runs <= 17


def test_one_value_at_a_time_needs_no_more_runs_than_two() -> None:
    runs = [
        searched(lambda x: math.exp(3 * x) - 4.0, asked(size=1e-4, at_once=count)).runs
        for count in (1, 2)
    ]
    assert runs[0] <= runs[1] <= 15


def test_a_range_given_from_its_upper_end_gives_the_same_limit() -> None:
    search = searched(lambda x: x - 0.3, asked(1.0, 0.0, size=0.01))
    assert search.verdict is not None
    assert search.verdict.interval is not None
    low, high = search.verdict.interval
    assert low <= 0.3 <= high
    assert search.verdict.rising


def test_ratios_are_resolved_over_a_logarithmic_range() -> None:
    limit = asked(1.0, 1e6, size=0.01, relative=True, log=True)
    search = searched(lambda x: math.log(x / 777.0), limit)
    assert search.verdict is not None
    assert search.verdict.interval is not None
    low, high = search.verdict.interval
    assert low <= 777.0 <= high <= 1.011 * low
    assert search.runs < 20


@pytest.mark.parametrize("noise", [0.0, 0.4])
def test_whole_numbers_end_with_neighbours(noise: float) -> None:
    limit = asked(10, 30, size=0.01, whole=True)
    search = searched(lambda n: n - 17.5, limit, noise)
    assert search.verdict is not None
    assert search.verdict.interval is not None
    low, high = search.verdict.interval
    assert FOUND == search.verdict.word
    assert 16.9 <= low <= 17.5 <= high <= 18.1
    assert all(place.value.is_integer() for place in search.places.values())


@pytest.mark.parametrize("noise", [0.0, 0.05])
def test_no_crossing_is_told_with_its_side(noise: float) -> None:
    search = searched(lambda x: -1.0 - x, asked(), noise)
    assert search.verdict is not None
    assert NO_CROSSING == search.verdict.word
    assert not search.verdict.above


@pytest.mark.parametrize("noise", [0.0, 0.05])
def test_several_crossings_are_told_with_their_places(noise: float) -> None:
    search = searched(lambda x: 10.0 * (x - 0.35) * (x - 0.65), asked(), noise)
    verdict = search.verdict
    assert verdict is not None
    assert SEVERAL == verdict.word
    (a, b), (c, d) = verdict.brackets
    assert a <= 0.35 <= b <= c <= 0.65 <= d


def test_noise_that_hides_the_side_is_told_when_the_runs_are_used_up() -> None:
    search = searched(lambda x: x - 0.4, asked(most_runs=60), 10.0)
    assert search.verdict is not None
    assert TOO_NOISY == search.verdict.word
    assert 60 == search.runs


def test_too_few_runs_leave_an_interval_and_the_number_that_would_do() -> None:
    search = searched(lambda x: 2.0 * (x - 0.4), asked(size=0.004, most_runs=30), 0.1)
    verdict = search.verdict
    assert verdict is not None
    assert verdict.interval is not None
    assert NOT_REACHED == verdict.word
    assert verdict.interval[0] <= 0.4 <= verdict.interval[1]
    assert verdict.needed > 100


def test_seeds_go_where_the_crossing_is() -> None:
    search = searched(lambda x: 2.0 * (x - 0.4), asked(size=0.02), 0.08)
    near = sum(len(each) for at, each in search.readings.items() if abs(at - 0.4) < 0.15)
    assert near > 0.7 * search.runs


def test_errors_that_are_not_known_are_taken_from_the_scatter_of_seeds() -> None:
    search = searched(lambda x: 2.0 * (x - 0.4), asked(size=0.06), 0.05, told=None)
    assert search.verdict is not None
    assert search.verdict.interval is not None
    assert not search.verdict.certain
    assert search.verdict.interval[0] <= 0.4 <= search.verdict.interval[1]
    assert max(map(len, search.readings.values())) >= 3


def test_seeds_that_all_answer_alike_make_answers_exact() -> None:
    search = searched(lambda x: x - 0.4, asked(size=0.01), 0.0, told=None)
    assert search.verdict is not None
    assert search.verdict.certain


def test_errors_told_too_small_are_found_out_by_comparing_seeds() -> None:
    """Told half of what they are: seeds show it, and the intervals hold the limit all the same."""
    scatter, held = [], 0
    for seed in range(40):
        limit = asked(size=0.04)
        search = searched(lambda x: 2.0 * (x - 0.4), limit, 0.03, told=0.5, seed=seed)
        assert search.verdict is not None
        assert search.verdict.interval is not None
        low, high = search.verdict.interval
        held += low <= 0.4 <= high
        assert search.pooled is not None
        scatter.append(search.pooled.scatter or 1.0)
    assert 1.4 < float(np.median(scatter)) < 2.6
    # At 95 %, fewer than this many of 40 are met once in a thousand times.
    assert binom.ppf(0.001, 40, 0.95) <= held


def test_a_pooled_error_is_that_of_the_mean_times_the_scatter_where_that_is_larger() -> None:
    readings = {0.0: [Reading(1.0, 0.1), Reading(1.6, 0.1)], 1.0: [Reading(-1.0, 0.1)]}
    found = pooled(readings, 0.0, "auto")
    assert found.known is not None
    # k^2 = (0.3^2 + 0.3^2) / 0.1^2 / 1
    assert math.sqrt(18.0) == pytest.approx(found.scatter, rel=1e-12, abs=0.0)
    expected = [0.1 / math.sqrt(2.0) * math.sqrt(18.0), 0.1 * math.sqrt(18.0)]
    assert expected == pytest.approx(found.known.error.tolist(), rel=1e-12, abs=0.0)
    assert not pooled(readings, 0.0, "none").known.error.any()  # type: ignore[union-attr]
    # Student, one degree of freedom: 12.706 against 1.960; from tables.
    single = math.sqrt(0.18) * 12.7062 / 1.95996
    assert single == pytest.approx(pooled(readings, 0.0, "scatter").single, rel=1e-4, abs=0.0)


def test_runs_that_fail_end_the_search() -> None:
    search = Search(asked())
    while wanted := search.next():
        for each in wanted:
            search.learn(each, None)
    assert search.verdict is not None
    assert RUNS_FAILED == search.verdict.word
    assert 5 == search.runs


def test_the_same_answers_lead_the_same_way() -> None:
    ways = [
        searched(lambda x: 2.0 * (x - 0.4), asked(size=0.03), 0.08, seed=5).intervals
        for _ in range(2)
    ]
    assert ways[0] == ways[1]


@pytest.mark.parametrize("sign", [1.0, -1.0])
def test_an_answer_that_flutters_within_the_resolution_has_one_limit_and_one_direction(
    sign: float,
) -> None:
    limit = asked(size=0.05)
    search = Search(limit)
    search.next()
    fluttering = {0.0: -1, 0.25: -1, 0.49: -1, 0.5: 1, 0.51: -1, 0.52: 1, 0.75: 1, 1.0: 1}
    for share, side in fluttering.items():
        wanted = Wanted(limit.place(share), 1, 1)
        search.learn(wanted, Reading(sign * side, 0.01))
    assert [] == search.next()
    assert search.verdict is not None
    assert FOUND == search.verdict.word
    assert (0.49, 0.52) == pytest.approx(search.verdict.interval, rel=1e-6, abs=0.0)
    assert search.verdict.rising is (sign > 0.0)


@pytest.mark.parametrize(("points", "at_once"), [(6, 1), (7, 3), (12, 3)])
def test_a_gap_that_no_run_answers_in_is_no_limit(points: int, at_once: int) -> None:
    search = Search(asked(size=0.001, points=points, at_once=at_once))
    while wanted := search.next():
        for each in wanted:
            x = each.place.value
            search.learn(each, None if 0.42 < x < 0.62 else Reading(x - 0.5, 0.0))
    assert search.verdict is not None
    assert RUNS_FAILED == search.verdict.word


def test_a_rare_failure_among_many_runs_does_not_end_a_search() -> None:
    search = Search(asked(size=0.05))
    generator = np.random.default_rng(1)
    while wanted := search.next():
        for each in wanted:
            if generator.random() < 0.03:
                search.learn(each, None)
                continue
            value = each.place.value - 0.4 + 0.1 * generator.standard_normal()
            search.learn(each, Reading(value, 0.1))
    assert search.failed >= 3
    assert search.verdict is not None
    assert FOUND == search.verdict.word
