"""Numbers with units in words."""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from driftwell.forms import Length, read_quantity, spelled


@pytest.mark.parametrize(
    ("value", "unit", "expected"),
    [
        (0.0035, "m", "3.5 mm"),
        (1.1e6, "Hz", "1.1 MHz"),
        (-20e3, "V/m", "-20 kV/m"),
        (3e7, "V/m^2", "30 MV/m^2"),
        (0.0, "V", "0 V"),
        (1.0, "T", "1 T"),
        (999.9999999, "V", "1 kV"),
        (1e-3, "s", "1 ms"),
        (1e-20, "s", "1e-20 s"),
        (float("inf"), "s", "inf s"),
    ],
)
def test_a_value_takes_the_prefix_that_leaves_1_to_999(
    value: float, unit: str, expected: str
) -> None:
    assert expected == spelled(value, unit)


@settings(max_examples=200, deadline=None)
@given(st.floats(1e-18, 1e15) | st.floats(-1e15, -1e-18))
def test_what_is_spelled_reads_back_as_the_same_length(value: float) -> None:
    assert value == pytest.approx(read_quantity(Length, spelled(value, "m")), rel=1e-5, abs=0.0)
