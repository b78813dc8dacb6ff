"""Answers as lines: value and error to the digits the error warrants, unit, wrapped note."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import answer_lines, common_lines, reading


def answer(value: float, error: float | None, unit: str = "m", note: str = "") -> Answer:
    return Answer("size", "rms-size", value, unit, error, note)


@pytest.mark.parametrize(
    ("value", "error", "unit", "expected"),
    [
        (300.123, 29.4, "K", "300 ± 29 K"),
        (1.0, 0.0012, "1", "1.0000 ± 0.0012"),
        (123456.7891, 0.0123, "Hz", "123.456789 ± 0.000012 kHz"),
        (1.2345e-6, 3e-8, "m rad", "1.235 ± 0.030 um rad"),
        (3.2e14, 1.1e12, "1/m^3", "(3.200 ± 0.011)e14 1/m^3"),
        (2.0e-5, 3e-6, "1", "(2.00 ± 0.30)e-5"),
        (-2.307e-20, 3e-22, "N", "(-2.307 ± 0.030)e-20 N"),
        (0.0, 1e-6, "m", "0.0 ± 1.0 um"),
        (-1e-9, 1e-3, "m", "0.0 ± 1.0 mm"),
        (0.99996, 0.0001, "1", "0.99996 ± 0.00010"),
        (0.0099996, 0.000996, "s", "10.0 ± 1.0 ms"),
        (999.96, 99.6, "K", "1.00 ± 0.10 kK"),
        (5.0, 12345.0, "K", "0 ± 12 kK"),
        (1.0, 1e-22, "m", "1.000000000 ± 1e-22 m"),
        (163650.971098183, 1.6e-9, "Hz", "163.6509711 ± 1.6e-12 kHz"),
    ],
)
def test_value_and_error_end_at_the_same_digit(
    value: float, error: float, unit: str, expected: str
) -> None:
    """The error has two; the prefix is that of the larger one."""
    assert [f"size  {expected}"] == answer_lines([answer(value, error, unit)], 100)


@pytest.mark.parametrize(
    ("value", "error", "expected"),
    [
        (0.0123456789, None, "12.3457 ± unknown mm"),
        (0.0123456789, math.inf, "12.3457 ± unknown mm"),
        (0.0123456789, math.nan, "12.3457 ± unknown mm"),
        (0.0123456789, 0.0, "12.3457 mm"),
        (0.0, 0.0, "0 m"),
        (2.307e-28, 0.0, "2.307e-28 m"),
        (5e-324, 0.0, "4.94066e-324 m"),
        (math.nan, 1.0, "none"),
        (math.inf, None, "none"),
    ],
)
def test_an_unknown_error_is_called_so_and_none_is_shown_where_there_is_none(
    value: float, error: float | None, expected: str
) -> None:
    assert [f"size  {expected}"] == answer_lines([answer(value, error)], 100)


_PREFIXES = {"f": -15, "p": -12, "n": -9, "u": -6, "m": -3, "": 0, "k": 3, "M": 6, "G": 9, "T": 12}


@given(
    value=st.floats(-1e12, 1e12).filter(lambda x: x == 0.0 or abs(x) > 1e-12),
    error=st.floats(1e-12, 1e12),
)
def test_what_is_read_is_the_value_within_the_last_digit(value: float, error: float) -> None:
    """For any value and error, the texts give both back: the error to a twentieth."""
    found = reading(answer(value, error, "K"))
    scale = 10.0 ** _PREFIXES[found.unit.removesuffix("K")]
    last = 10.0 ** -len(found.value.partition(".")[2]) * scale
    assert abs(float(found.error) * scale - error) <= 0.0501 * error
    assert abs(float(found.value) * scale - value) <= max(0.051 * error, 0.51 * last)
    assert 0.001 * error <= last or last <= 2e-9 * max(abs(value), error)


def test_lines_are_aligned_and_long_notes_are_wrapped_beside_them() -> None:
    lines = answer_lines(
        [
            Answer("held", "fraction-left", 1.0, "1", 0.0012, "400 of 400 charges"),
            Answer("hot axis", "temperature", 300.0, "K", 29.0, "about the mean " * 5),
        ],
        60,
    )
    assert [
        "held      1.0000 ± 0.0012  400 of 400 charges",
        "hot axis     300 ± 29 K    about the mean about the mean",
        " " * 27 + "about the mean about the mean",
        " " * 27 + "about the mean",
    ] == lines


def test_in_a_narrow_place_notes_stand_below() -> None:
    lines = answer_lines([answer(1.0, 0.1, note="a note of some words that go on")], 40)
    assert ["size  1.00 ± 0.10 m", "    a note of some words that go on"] == lines


def test_a_long_name_has_a_line_of_its_own() -> None:
    lines = answer_lines(
        [Answer("n" * 60, "rms-size", 1.0, "m", 0.1, "note"), answer(2.0, 0.1)], 80
    )
    assert ["n" * 60, "      1.00 ± 0.10 m  note", "size  2.00 ± 0.10 m"] == lines


def test_nothing_asked_makes_no_lines() -> None:
    assert [] == answer_lines([], 80)


def test_a_note_of_several_lines_is_one_paragraph() -> None:
    assert ["size  1.00 ± 0.10 m  one two"] == answer_lines([answer(1.0, 0.1, note="one\ntwo")], 80)


def test_the_sign_may_be_another_where_the_usual_one_cannot_be_written() -> None:
    assert ["size  1.00 +- 0.10 m"] == answer_lines([answer(1.0, 0.1)], 80, "+-")


@pytest.mark.parametrize(
    ("errors", "expected"),
    [
        ((), []),
        ((0.0, 0.0), []),
        (
            (4e-5, 4.02e-5),
            "coulomb error: rms 4.0e-05 of the force, as measured on the way; it is not in the "
            "errors above",
        ),
        (
            (0.0, 4e-5, 1e-6),
            "coulomb error: rms 1.0e-06 to 4.0e-05 of the force, as measured on the way, behind 2 "
            "of 3; it is not in the errors above",
        ),
    ],
)
def test_the_error_of_the_forces_is_told_beside_the_answers(
    errors: tuple[float, ...], expected: str
) -> None:
    """In its own unit, and only where there is one."""
    answers = [replace(answer(1.0, 0.1), coulomb_error=each) for each in errors]
    lines = common_lines(answers, 80)
    assert expected == (" ".join(line.strip() for line in lines) or [])
    assert all(len(line) <= 80 for line in lines)


def test_the_error_of_a_solved_field_is_told_on_a_line_of_its_own() -> None:
    answers = [replace(answer(1.0, 0.1), coulomb_error=1e-5, field_error=3e-6)] * 2
    coulomb, field = common_lines(answers, 200)
    assert coulomb.startswith("coulomb error: rms 1.0e-05 of the force")
    assert field.startswith("field error: rms 3.0e-06 of the electrodes' field, as measured when")
