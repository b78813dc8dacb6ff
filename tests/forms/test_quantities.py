"""Quantities: strings with a unit become SI numbers, exactly; what is no quantity is told."""

from __future__ import annotations

import math
import time

import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell import constants
from driftwell.forms import (
    Angle,
    Charge,
    Current,
    ElectricField,
    Emittance,
    Energy,
    Frequency,
    Length,
    MagneticField,
    Mass,
    Temperature,
    Time,
    Velocity,
    Voltage,
    read_quantity,
)


@pytest.mark.parametrize(
    ("declared", "text", "expected"),
    [
        (Length, "3.5 mm", 0.0035),
        (Length, "60um", 60e-6),
        (Length, " -.5 km ", -500.0),
        (Length, "1e-3 m", 1e-3),
        (Length, "0", 0.0),
        (Length, "5 µm", 5e-6),
        (Time, "10 us", 1e-5),
        (Frequency, "1.1 MHz", 1.1e6),
        (Frequency, "3 1/s", 3.0),
        (Mass, "137.905 u", 137.905 * constants.ATOMIC_MASS),
        (Charge, "-2 e", -2.0 * constants.ELEMENTARY_CHARGE),
        (Voltage, "180 V", 180.0),
        (Current, "12 uA", 12e-6),
        (Energy, "1 eV", constants.ELEMENTARY_CHARGE),
        (Temperature, "300 K", 300.0),
        (Velocity, "3 km/s", 3000.0),
        (ElectricField, "20 kV/m", 20e3),
        (MagneticField, "1.5 T", 1.5),
        (Emittance, "5 mm mrad", 5e-6),
        (Angle, "180 deg", math.pi),
    ],
)
def test_a_quantity_is_read_in_si_units(declared: object, text: str, expected: float) -> None:
    # a few units in the last place: factors of u, e and eV are rounded once
    assert pytest.approx(expected, rel=5e-16, abs=0.0) == read_quantity(declared, text)


def test_degrees_celsius_are_counted_from_their_own_zero() -> None:
    assert pytest.approx(300.15, rel=1e-15, abs=0.0) == read_quantity(Temperature, "27 degC")


@given(st.floats(allow_nan=False, allow_infinity=False))
def test_a_number_with_its_si_unit_is_read_as_that_very_number(value: float) -> None:
    assert value == read_quantity(Length, f"{value!r} m")
    assert value == read_quantity(Emittance, f"{value!r} m*rad")


@given(st.integers(-10_000, 10_000))
def test_decimal_prefixes_give_the_nearest_number(value: int) -> None:
    assert float(f"{value}e-6") == read_quantity(Time, f"{value} us")


@pytest.mark.parametrize(
    ("declared", "text", "needed"),
    [
        (Length, "3.5", "a unit after the number"),
        (Length, "mm", "a number and its unit"),
        (Length, "", "a number and its unit"),
        (Length, "3,5 mm", "a number and its unit"),
        (Length, "1e400 m", "a finite value"),
        (Length, "1e9999999999 m", "not too large or small"),
        (Length, "inf m", "a number and its unit"),
        (Length, "nan m", "a number and its unit"),
        (Length, "3.5 V", "'V' is a unit of voltage"),
        (Length, "3.5 mmm", "no unit is called 'mmm'; did you mean 'mm'?"),
        (Length, "5 m^3", "'m^3' is a unit of volume"),
        (Length, "5 m^-7", "'m^-7' is a unit of 1 / length ** 7"),
        (Time, "2 sm", "no unit is called 'sm'; did you mean 'ms'?"),
        (Frequency, "80 khz", "no unit is called 'khz'; did you mean 'kHz'?"),
        (Frequency, "80 rad/s", "'rad/s' is an angular frequency; give cycles per second"),
        (MagneticField, "1.5 Tesla", "no unit is called 'Tesla'; did you mean 'T'?"),
        (Voltage, "3 kv", "no unit is called 'kv'; did you mean 'kV'?"),
        (Temperature, "20 C", "'C' is a unit of charge"),
        (Velocity, "3 %", "'%' is a unit of no dimension"),
        (Length, "3 m" + "m" * 200, "a number and its unit"),
    ],
)
def test_what_is_no_such_quantity_is_told_with_what_is_needed(
    declared: object, text: str, needed: str
) -> None:
    with pytest.raises(ValueError, match=r"needs an? ") as fault:
        read_quantity(declared, text)
    assert needed in str(fault.value)


@pytest.mark.parametrize(
    "unit", ["m**9**9**9**9", "m ** 9 ** 9 ** 9", "m^(9^(9^9))", "m**(9**9)**9", "m**99999999"]
)
def test_a_unit_with_powers_of_powers_is_refused_without_working_them_out(unit: str) -> None:
    start = time.perf_counter()
    with pytest.raises(ValueError, match="is not a unit"):
        read_quantity(Length, f"1 {unit}")
    assert time.perf_counter() - start < 5.0


@given(st.text(max_size=30))
def test_any_text_is_read_or_refused_and_nothing_else(text: str) -> None:
    for written in (text, f"1 {text}"):
        try:
            value = read_quantity(Length, written)
        except ValueError:
            continue
        assert math.isfinite(value)
