"""What a key may hold is found at its place in a raw table, kinds of its parts included."""

from __future__ import annotations

import tomllib

import pytest

from driftwell.forms.declared import Dimensioned, Number, Words
from driftwell.forms.held import held_at, read_dimensioned
from driftwell.scenario.model import Scenario
from tests.scenario.good_scenarios import TRAP

DATA = tomllib.loads(TRAP)


@pytest.mark.parametrize(
    ("path", "expected"),
    [
        (("duration",), "s"),
        (("cloud", 0, "shape", "sigma", 1), "m"),
        (("cloud", 0, "shape", "sigma"), "m"),
        (("field", 0, "voltage", "amplitude"), "V"),
        (("field", 0, "voltage"), "V"),
        (("field", 0, "radius"), "m"),
        (("field", 1, "axial_frequency", "value"), "Hz"),
        (("stepping", "step"), "s"),
        (("species", "barium", "mass"), "kg"),
    ],
)
def test_a_dimension_is_found(path: tuple[str | int, ...], expected: str) -> None:
    units = [
        held.si_unit for held in held_at(path, DATA, Scenario) if isinstance(held, Dimensioned)
    ]
    assert [expected] * len(units) == units
    assert units


@pytest.mark.parametrize(
    ("path", "whole"),
    [(("seed",), True), (("cloud", 0, "count"), True), (("coulomb", "accuracy"), False)],
)
def test_a_number_is_found(path: tuple[str | int, ...], whole: bool) -> None:
    assert [whole] == [
        held.whole for held in held_at(path, DATA, Scenario) if isinstance(held, Number)
    ]


def test_the_words_beside_a_quantity_are_found_too() -> None:
    assert Words(("auto",)) in held_at(("stepping", "step"), DATA, Scenario)


@pytest.mark.parametrize(
    "path",
    [
        ("cloud", 0, "zz"),
        ("zz",),
        ("duration", "x"),
        ("field", 0, "axial_frequency"),
        ("cloud", "x"),
    ],
)
def test_where_there_is_no_such_key_nothing_is_held(path: tuple[str | int, ...]) -> None:
    assert () == held_at(path, DATA, Scenario)


def test_a_quantity_is_read_by_its_declaration() -> None:
    declared = Dimensioned("a length", "m", "3.5 mm")
    assert 0.002 == read_dimensioned(declared, "2 mm")
    with pytest.raises(ValueError, match=r'needs a length such as "3\.5 mm"'):
        read_dimensioned(declared, "2 s")
