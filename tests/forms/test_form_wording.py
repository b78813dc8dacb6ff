"""Declared keys and values in words, and values as a scenario writes them."""

from __future__ import annotations

import math
import tomllib
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.forms import Bound
from driftwell.forms.declared import (
    Choice,
    Declared,
    Dimensioned,
    Flag,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
)
from driftwell.forms.wording import (
    as_found,
    bound_words,
    either,
    name_text,
    needed,
    quoted,
    raw_value,
    toml_text,
)

LENGTH = Dimensioned("a length", "m", "3.5 mm")
TIME = Dimensioned("a time", "s", "2 ms")


@pytest.mark.parametrize(
    ("declared", "expected"),
    [
        (LENGTH, 'a length such as "3.5 mm"'),
        (Number(True), "a whole number"),
        (Number(False), "a plain number"),
        (Text(1, 60), "text in quotes"),
        (Flag(), "true or false"),
        (Words(("x", "y", "z")), '"x", "y" or "z"'),
        (Row((LENGTH, LENGTH)), 'a list of 2, each a length such as "3.5 mm"'),
        (Row((LENGTH, TIME)), 'a list of a length such as "3.5 mm", a time such as "2 ms"'),
        (Several(TIME), 'a list, each entry a time such as "2 ms"'),
        (Named(Flag()), "a table of names, each true or false"),
        (
            Choice((("word", Words(("auto",))), ("value", TIME)), None),
            '"auto", or a time such as "2 ms"',
        ),
    ],
)
def test_what_a_key_may_hold_is_said_in_words(declared: Declared, expected: str) -> None:
    assert expected == needed(declared)


def test_the_example_of_a_key_takes_the_place_of_the_usual_one() -> None:
    assert 'a length such as "1 km"' == needed(LENGTH, "1 km")
    assert 'text such as "barium"' == needed(Text(), "barium")
    assert 'a list such as ["1 m"]' == needed(Several(LENGTH), ["1 m"])


@pytest.mark.parametrize(
    ("words", "expected"),
    [((), ""), (("a",), '"a"'), (("a", "b"), '"a" or "b"'), (("a", "b", "c"), '"a", "b" or "c"')],
)
def test_words_to_choose_from_are_joined_by_or(words: tuple[str, ...], expected: str) -> None:
    assert expected == either(words)


def test_bounds_carry_a_unit_save_where_the_limit_is_zero() -> None:
    assert "greater than 0" == bound_words((Bound(above=0.0),), "m")
    assert "at most 2 m" == bound_words((Bound(most=2.0),), "m")
    assert "greater than 0 and less than 3 s" == bound_words(
        (Bound(above=0.0), Bound(below=3.0)), "s"
    )


@pytest.mark.parametrize(
    ("value", "expected"),
    [
        ("3 mm", '"3 mm"'),
        (True, "true"),
        (-1, "-1"),
        (1.5, "1.5"),
        (math.inf, "inf"),
        (math.nan, "nan"),
        ([1, "a", []], '[1, "a", []]'),
        ({"a": 1, "b c": {}}, '{ a = 1, "b c" = {} }'),
        ([[[[1]]]], "[[[[ ... ]]]]"),
        ("a\nb\u2028\x7f\u202e", '"a\\nb\\U00002028\\U0000007F\\U0000202E"'),
        (10**400, "a whole number of more than 64 bits"),
    ],
)
def test_a_found_value_is_shown_as_toml_on_one_line(value: Any, expected: str) -> None:
    assert expected == as_found(value)


def test_a_key_is_quoted_where_toml_needs_it() -> None:
    assert "axial_frequency" == name_text("axial_frequency")
    assert '"end caps"' == name_text("end caps")
    assert '""' == name_text("")


RAW = st.recursive(
    st.booleans()
    | st.integers(-(2**63), 2**63 - 1)
    | st.floats(allow_nan=False)
    | st.text(st.characters(exclude_categories=["Cs"])),
    lambda inner: (
        st.lists(inner, max_size=4)
        | st.dictionaries(st.text(st.characters(exclude_categories=["Cs"])), inner, max_size=4)
    ),
    max_leaves=10,
)


@given(RAW)
def test_a_raw_value_written_as_toml_is_read_back_as_itself(value: Any) -> None:
    assert {"value": value} == tomllib.loads(f"value = {toml_text(value)}")


@given(st.text(st.characters(exclude_categories=["Cs"])))
def test_quoted_text_can_be_printed_on_one_line(text: str) -> None:
    assert quoted(text).isprintable()


@pytest.mark.parametrize(
    ("declared", "value", "expected"),
    [
        (LENGTH, 0.0035, "0.0035 m"),
        (LENGTH, 1000.0, "1000 m"),
        (LENGTH, 0.1 + 0.2, "0.30000000000000004 m"),
        (Row((LENGTH, TIME)), (1.0, 2.0), ["1 m", "2 s"]),
        (Choice((("word", Words(("auto",))), ("value", TIME)), None), "auto", "auto"),
        (Choice((("word", Words(("auto",))), ("value", TIME)), None), 1.5, "1.5 s"),
        (Named(TIME), {"a": 1.0}, {"a": "1 s"}),
        (Flag(), True, True),
        (Words(("a", "b")), "b", "b"),
    ],
)
def test_a_read_value_is_put_back_as_the_raw_value_it_reads_from(
    declared: Declared, value: Any, expected: Any
) -> None:
    assert expected == raw_value(declared, value)
