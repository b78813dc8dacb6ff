"""Limits, prefixes and labels of axes."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.report.paper.ruler import in_words, interval, prefix_size, ruler, widened

NUMBERS = st.floats(-1e9, 1e9, allow_nan=False)


@given(st.lists(NUMBERS, min_size=1, max_size=20), st.booleans(), st.sampled_from([0.0, 1e-6, 2.0]))
def test_limits_hold_all_values_and_are_never_the_same(values, zero, least):
    low, high = interval(values, least, zero)
    assert low < high
    assert low <= min(values)
    assert high >= max(values)
    assert not zero or low <= 0.0 <= high


@given(st.lists(NUMBERS, min_size=1, max_size=20))
def test_values_shown_lie_within_the_limits_shown(values):
    found = ruler(interval(values), "m")
    low, high = found.limits
    near = 1e-9 * (high - low)
    assert low < high
    assert np.all(found.shown(values) >= low - near)
    assert np.all(found.shown(values) <= high + near)


def test_values_that_are_no_numbers_do_not_count():
    assert (-0.05, 1.05) == pytest.approx(interval([np.nan, 0.0, 1.0, np.inf, -np.inf, 1e200]))


def test_a_thing_without_width_gets_the_width_asked_for():
    assert (-1e-3, 1e-3) == interval([0.0, 0.0], least=2e-3)
    assert (-1e-3, 1e-3) == pytest.approx(interval([0.0, 1e-18], least=2e-3))
    assert (2.7, 3.3) == pytest.approx(interval([3.0]))


def test_zero_at_an_end_has_no_margin_beyond():
    assert (0.0, 1.05) == pytest.approx(interval([0.5, 1.0], zero=True))
    assert (0.0, 1.0) == interval([0.0], zero=True)


def test_limits_are_widened_about_their_middle_or_upwards_from_zero():
    assert (-1.0, 5.0) == widened((1.0, 3.0), 6.0)
    assert (0.0, 6.0) == widened((0.0, 3.0), 6.0)
    assert (1.0, 3.0) == widened((1.0, 3.0), 0.5)


@pytest.mark.parametrize(
    ("largest", "size"),
    [(1.0, 1.0), (999.0, 1.0), (1e3, 1e3), (0.25, 1e-3), (3e-6, 1e-6), (0.0, 1.0), (1e-40, 1e-18)],
)
def test_the_prefix_leaves_one_to_a_thousand(largest, size):
    assert size == prefix_size(largest)


@pytest.mark.parametrize(
    ("limits", "unit", "label"),
    [
        ((-60e-6, 60e-6), "m", "z (µm)"),
        ((0.0, 2e-3), "s", "z (ms)"),
        ((0.0, 5e3), "K", "z (kK)"),
        ((0.9994, 1.0006), "m", "z − 1 m (µm)"),
        ((-0.25003, -0.25001), "m", "z + 250.02 mm (µm)"),
        ((0.0, 400.0), "", "z"),
    ],
)
def test_a_label_names_the_unit_and_a_far_origin(limits, unit, label):
    assert label == ruler(limits, unit).label("z")


def test_far_values_are_shown_from_the_origin_on():
    found = ruler((0.9994, 1.0006), "m")
    assert [0.0, 500.0] == pytest.approx(found.shown([1.0, 1.0005]))


def test_values_in_words_carry_the_sign_micro_and_a_minus():
    assert "60 µm" == in_words(60e-6, "m")
    assert "−1.5 µm/s" == in_words(-1.5e-6, "m/s")
    assert "20 u" == in_words(20.0, "u")
