"""Each key of a TOML text is found on the line it stands on."""

from __future__ import annotations

import tomllib
from typing import Any

import pytest
from hypothesis import given
from hypothesis import strategies as st

from driftwell.scenario.lines import KeyLines
from tests.scenario.good_scenarios import GOOD, toml_file

TEXT = '''\
# a comment with [brackets] and "quotes"
title = "x # not a comment" # a comment
a.b.c = 1
a.b."d e" = [1,
  2, # a comment ]
  { x = 1, y = """
  } """, z = [[1],
  [2]] },
]
date = 1979-05-27 07:32:00
"q\\"" = 'lit#'
empty = []
none = {}
[species.barium]
mass = "1 u"

[[cloud]]
name = "a"
[cloud.shape]
kind = """a""""
[[cloud]]
shape.sigma = ["1",
  "2"]
[[cloud.x]]
y = 1
[[cloud.x]]
y = 2
[cloud.x.z]
k = \'\'\'
"""
\'\'\'\'
j = 3
'''


@pytest.mark.parametrize(
    ("path", "expected"),
    [
        (("title",), 2),
        (("a",), 3),
        (("a", "b", "c"), 3),
        (("a", "b", "d e"), 4),
        (("a", "b", "d e", 1), 5),
        (("a", "b", "d e", 2), 6),
        (("a", "b", "d e", 2, "y"), 6),
        (("a", "b", "d e", 2, "z"), 7),
        (("a", "b", "d e", 2, "z", 1), 8),
        (("a", "b", "d e", 2, "z", 1, 0), 8),
        (("date",), 10),
        (('q"',), 11),
        (("none",), 13),
        (("species", "barium"), 14),
        (("species", "barium", "mass"), 15),
        (("cloud", 0), 17),
        (("cloud", 0, "name"), 18),
        (("cloud", 0, "shape"), 19),
        (("cloud", 0, "shape", "kind"), 20),
        (("cloud", 1), 21),
        (("cloud", 1, "shape", "sigma"), 22),
        (("cloud", 1, "shape", "sigma", 1), 23),
        (("cloud", 1, "x", 0, "y"), 25),
        (("cloud", 1, "x", 1), 26),
        (("cloud", 1, "x", 1, "z", "k"), 29),
        (("cloud", 1, "x", 1, "z", "j"), 32),
    ],
)
def test_a_key_an_entry_or_a_table_is_found_on_its_line(
    path: tuple[str | int, ...], expected: int
) -> None:
    tomllib.loads(TEXT)
    assert expected == KeyLines(TEXT).line(path)


@pytest.mark.parametrize(
    ("path", "expected"),
    [
        ((), 1),
        (("missing",), 1),
        (("species", "barium", "charge"), 14),
        (("cloud", 0, "shape", "sigma", 2), 19),
        (("cloud", 7, "name"), 17),
    ],
)
def test_a_key_that_is_not_there_is_told_on_the_line_of_the_table_around_it(
    path: tuple[str | int, ...], expected: int
) -> None:
    assert expected == KeyLines(TEXT).line(path)


def test_windows_line_ends_count_as_one() -> None:
    assert 32 == KeyLines(TEXT.replace("\n", "\r\n")).line(("cloud", 1, "x", 1, "z", "j"))


KEYS = st.text(st.characters(exclude_categories=["Cs"]), max_size=6)
TABLES = st.recursive(
    st.integers(-9, 9) | KEYS | st.booleans(),
    lambda inner: st.lists(inner, max_size=3) | st.dictionaries(KEYS, inner, max_size=3),
    max_leaves=12,
)


@given(st.dictionaries(KEYS, TABLES, max_size=5))
def test_every_key_of_any_valid_text_has_a_line_that_holds_it(table: dict[str, Any]) -> None:
    text = toml_file(table)
    assert table == tomllib.loads(text)
    lines, found = text.split("\n"), KeyLines(text)
    for name in table:
        line = lines[found.line((name,)) - 1]
        assert name in tomllib.loads(line)


def test_lines_of_keys_in_whole_scenarios_begin_with_those_keys() -> None:
    for text in GOOD.values():
        found, lines = KeyLines(text), text.split("\n")
        for section, entries in tomllib.loads(text).items():
            for i, entry in enumerate(entries if isinstance(entries, list) else []):
                for key in entry:
                    line = lines[found.line((section, i, key)) - 1]
                    assert line.lstrip("[").startswith((key, f"{section}.{key}"))
