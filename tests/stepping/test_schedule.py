"""The schedule: where the duration is cut, and how many steps lie between."""

from __future__ import annotations

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.errors import ScenarioError
from driftwell.stepping.schedule import BREAK, RECORD, SNAPSHOT, TRACE, Schedule, regular, schedule


def times(*values: float) -> np.ndarray:
    """Times of marks, s."""
    return np.array(values, dtype=np.float64)


def longest(plan: Schedule) -> float:
    """The longest step of a schedule, s."""
    return float((np.diff(plan.time) / plan.steps).max())


def test_regular_times_begin_at_zero_and_end_with_the_duration() -> None:
    """Whole multiples between; a last shorter interval where it does not divide."""
    assert [0.0, 0.3, 0.6, 0.9] == pytest.approx(regular(0.3, 0.9), rel=1e-15, abs=0.0)
    assert 0.9 == regular(0.3, 0.9)[-1]
    assert [0.0, 0.4, 0.8, 0.9] == pytest.approx(regular(0.4, 0.9), rel=1e-15, abs=0.0)
    assert [0.0, 0.9] == list(regular(5.0, 0.9))


@given(st.integers(1, 5000), st.floats(1e-12, 1e3))
def test_intervals_that_divide_the_duration_leave_no_splinter(count: int, every: float) -> None:
    """Whatever the rounding of count times every."""
    found = regular(every, count * every)
    assert count + 1 == len(found)
    assert count * every == found[-1]
    assert (np.diff(found) > 0.5 * every).all()


@pytest.mark.parametrize(("every", "duration"), [(1e-9, 1.0), (1e-300, 1e300), (5e-324, 1.0)])
def test_too_many_regular_times_are_refused(every: float, duration: float) -> None:
    """In words, before they are made."""
    with pytest.raises(ScenarioError, match="take a longer interval"):
        regular(every, duration)


def test_marks_of_several_kinds_at_one_time_are_one_mark() -> None:
    """With all their flags, also where rounding sets them apart by a few bits."""
    plan = schedule(
        1.0,
        1e-3,
        [
            (RECORD, regular(0.1, 1.0)),
            (TRACE, times(*(k * 0.05 for k in range(21)))),
            (BREAK, times(0.1 + 0.2, 0.31)),
            (SNAPSHOT, times(0.0, 1.0)),
        ],
    )
    assert 22 == len(plan.time)
    at = {round(float(t), 9): int(f) for t, f in zip(plan.time, plan.flags, strict=True)}
    assert RECORD | TRACE | SNAPSHOT == at[0.0]
    assert RECORD | TRACE | BREAK == at[0.3]
    assert BREAK == at[0.31]
    assert TRACE == at[0.35]
    assert RECORD | TRACE | SNAPSHOT == at[1.0]


def test_a_break_is_met_exactly() -> None:
    """The times of waveforms' jumps are marks to the last bit."""
    jumps = times(0.123456789, 0.5, 0.987654321)
    plan = schedule(1.0, 0.07, [(BREAK, jumps), (RECORD, regular(0.25, 1.0))])
    assert set(jumps) <= set(plan.time)
    for jump in jumps:
        assert plan.flags[np.flatnonzero(plan.time == jump)[0]] & BREAK


def test_without_marks_there_is_one_interval() -> None:
    """From zero to the duration."""
    plan = schedule(1.0, 0.3, [])
    assert [0.0, 1.0] == list(plan.time)
    assert [4] == list(plan.steps)
    assert 4 == plan.total_steps


def test_a_step_that_divides_the_interval_is_taken_as_it_is() -> None:
    """Rounding does not add a step."""
    assert [10, 10, 10] == list(schedule(0.3, 0.01, [(RECORD, regular(0.1, 0.3))]).steps)
    assert [11] == list(schedule(1.0, 1.0 / 10.001, []).steps)


@given(
    st.floats(1e-9, 1e3),
    st.floats(1e-4, 20.0),
    st.lists(st.floats(0.0, 1.0), max_size=30),
    st.lists(st.floats(0.0, 1.0), max_size=30),
    st.integers(1, 12),
)
def test_any_marks_make_a_schedule_that_keeps_its_word(
    duration: float, step: float, first: list[float], second: list[float], multiple: int
) -> None:
    """Times rise from zero to the duration, no step is longer than asked, every flag is kept.

    Every asked time has a mark within a millionth of a step and of the mean distance; the number
    of steps is a multiple, and no multiple less would do.
    """
    marks = [(TRACE, duration * np.array(first)), (BREAK, duration * np.array(second))]
    plan = schedule(duration, step * duration, marks, multiple)
    assert 0.0 == plan.time[0]
    assert duration == plan.time[-1]
    assert (np.diff(plan.time) > 0.0).all()
    assert len(plan.time) == len(plan.flags) == len(plan.steps) + 1
    assert longest(plan) <= step * duration * (1.0 + 2e-9)
    assert (plan.steps % multiple == 0).all()
    fewer = np.diff(plan.time) / np.maximum(plan.steps - multiple, 1e-300)
    assert (fewer[plan.steps > multiple] > step * duration * (1.0 - 1e-9)).all()
    count = 2 + len(first) + len(second)
    near = 2e-6 * min(step, 1.0) * duration * count
    for flag, at in marks:
        for t in at:
            close = np.abs(plan.time - t) <= near
            assert (plan.flags[close] & flag).any()


def test_a_long_step_swallows_no_marks() -> None:
    """A step longer than the whole run leaves every record in its place."""
    plan = schedule(1e-3, 10.0, [(RECORD, regular(1e-6, 1e-3))])
    assert 1001 == len(plan.time)
    assert (plan.steps == 1).all()


def test_too_many_marks_are_refused() -> None:
    """In words that say what to do."""
    many = np.linspace(0.0, 1.0, 11_000_000)
    with pytest.raises(ScenarioError, match="record or sample less often"):
        schedule(1.0, 0.1, [(RECORD, many), (TRACE, many)])


@pytest.mark.parametrize("step", [1e-30, 5e-324])
def test_too_many_steps_are_refused(step: float) -> None:
    """Rather than counted beyond what an integer holds, which would leave a single step."""
    with pytest.raises(ScenarioError, match="take a longer step"):
        schedule(1.0, step, [])
    assert math.isclose(1e12, schedule(1.0, 1e-12, []).total_steps)
