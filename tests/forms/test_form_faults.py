"""Faults of a form: the user's own key path, what was found, what is needed, in plain words."""

from __future__ import annotations

import math
from typing import Annotated, Any, Literal, Self

import pytest

from driftwell.forms import (
    Bound,
    Count,
    Direction,
    Form,
    Length,
    Name,
    Positive,
    Real,
    Time,
    TrueOrFalse,
    checked,
    key,
    one_of,
    or_word,
    per_axis,
    refuse,
)
from driftwell.forms.faults import Fault, nearest, read_form
from driftwell.forms.waveforms import Sine, VoltageWave

Angle = Annotated[Real, Bound(least=-1.0, most=2.0)]


class Rods(Form):
    """Rods."""

    kind: Literal["rods"]
    radius: Positive[Length] = key("radius", example="2 mm")
    voltage: VoltageWave = key("voltage", default=0.0)


class Ring(Form):
    """A ring."""

    kind: Literal["ring"]
    inner: Length = key("inside")
    outer: Length = key("outside")

    @checked
    def _ordered(self) -> Self:
        if self.outer <= self.inner:
            raise refuse("`outer` must be larger than `inner`")
        return self


AnyPart = one_of((Rods, Ring))
StepTime = or_word(("auto", "none"), Positive[Time])
Size = per_axis(Length)


class Machine(Form):
    """A machine."""

    title: Name = key("title", default="x")
    part: tuple[AnyPart, ...] = key("parts", default=())  # type: ignore[valid-type]
    spare: dict[Name, Ring] = key("spares", default={})
    step: StepTime = key("step", default="auto")  # type: ignore[valid-type]
    size: Size = key("size", default=0.0)  # type: ignore[valid-type]
    at: tuple[Length, Length, Length] = key("place", default=(0.0, 0.0, 0.0))
    along: Direction = key("direction", default=(0.0, 0.0, 1.0))
    number: Count = key("number", default=1)
    angle: Angle = key("angle", default=0.0)
    runs: TrueOrFalse = key("runs", default=True)
    longest: Annotated[Length, Bound(most=2.0)] = key("longest", default=0.0)
    ring: Ring | None = key("a ring", default=None)


def faults(data: Any) -> list[tuple[str, str, str]]:
    return [
        (".".join(map(str, fault.path)), fault.found, fault.needed)
        for fault in read_form(Machine, data)[1]
    ]


KINDS = "The kinds are rods, ring"
WAVES = "The kinds are sine, ramp, step, pulses, table, noise"
A_LENGTH = 'a length such as "3.5 mm"'
THREE = f"a list of 3, each {A_LENGTH}"
RODS = {"kind": "rods", "radius": "1 mm"}
RING = {"kind": "ring", "inner": "1 mm", "outer": "2 mm"}


@pytest.mark.parametrize(
    ("data", "expected"),
    [
        # keys
        ({"titel": "x"}, ("titel", "", 'unknown key; did you mean "title"?')),
        ({"runs_": True}, ("runs_", "", 'unknown key; did you mean "runs"?')),
        (
            {"spare": {"a": RING | {"x": 1}}},
            ("spare.a.x", "", "unknown key; the keys here are kind, inner, outer"),
        ),
        (
            {"part": [RODS | {"amplitude": "3 V"}]},
            ("part.0.amplitude", "", 'unknown key here; did you mean "voltage.amplitude"?'),
        ),
        (
            {"part": [RODS | {"title": "x"}]},
            (
                "part.0.title",
                "",
                'unknown key here; "title" belongs at the top of the file, before any [table]',
            ),
        ),
        ({"outer": 1}, ("outer", "", 'unknown key here; did you mean "ring.outer"?')),
        (
            {"spare": {"a": RING | {"title": "x"}}},
            (
                "spare.a.title",
                "",
                'unknown key here; "title" belongs at the top of the file, before any [table]',
            ),
        ),
        (
            {"part": [RODS | {"outer": "1 mm"}]},
            ("part.0.outer", "", 'unknown key here; "outer" belongs in [ring]'),
        ),
        (
            {"part": [{"kind": "rods"}]},
            ("part.0.radius", "", 'missing; needs a length such as "2 mm"'),
        ),
        ({"spare": {"": RING}}, ("spare.", "", "this name needs 1 to 60 characters on one line")),
        # kinds
        (
            {"part": [{"kind": "rod"}]},
            ("part.0.kind", '"rod"', f'unknown kind; did you mean "rods"? {KINDS}'),
        ),
        (
            {"part": [{"kind": "?"}]},
            ("part.0.kind", '"?"', "unknown kind; the kinds are rods, ring"),
        ),
        ({"part": [{"kind": 3}]}, ("part.0.kind", "3", "unknown kind; the kinds are rods, ring")),
        ({"part": [{}]}, ("part.0.kind", "", 'missing; needs "rods" or "ring"')),
        (
            {"part": [{"kid": "rods"}]},
            ("part.0.kid", "", 'unknown key; did you mean "kind"? It must be "rods" or "ring"'),
        ),
        ({"part": [3]}, ("part.0", "3", 'needs a table with kind = "rods" or "ring"')),
        (
            {"part": [RODS | {"voltage": {"kind": "sinus"}}]},
            ("part.0.voltage.kind", '"sinus"', f'unknown kind; did you mean "sine"? {WAVES}'),
        ),
        # quantities
        (
            {"part": [RODS | {"radius": "-1 mm"}]},
            ("part.0.radius", '"-1 mm"', "must be greater than 0"),
        ),
        (
            {"part": [RODS | {"radius": "1 V"}]},
            (
                "part.0.radius",
                '"1 V"',
                "needs a length such as \"2 mm\" ('V' is a unit of voltage)",
            ),
        ),
        (
            {"part": [RODS | {"voltage": 3}]},
            (
                "part.0.voltage",
                "3",
                'needs a voltage such as "180 V" (a number and its unit in quotes)',
            ),
        ),
        (
            {"part": [RODS | {"voltage": {"amplitude": "1 V", "frequency": "0 Hz"}}]},
            ("part.0.voltage.frequency", '"0 Hz"', "must be greater than 0"),
        ),
        ({"longest": "3 m"}, ("longest", '"3 m"', "must be at most 2 m")),
        (
            {"step": "never"},
            (
                "step",
                '"never"',
                'needs "auto" or "none", or a time such as "2 ms" (a number and its unit)',
            ),
        ),
        ({"step": "-1 s"}, ("step", '"-1 s"', "must be greater than 0")),
        ({"size": ["1 m", "2 m"]}, ("size", '["1 m", "2 m"]', f"needs {THREE}; there are 2 here")),
        (
            {"size": "1"},
            ("size", '"1"', f"needs {A_LENGTH}, or {THREE} (a unit after the number)"),
        ),
        # lists
        ({"at": ["0", "0"]}, ("at", '["0", "0"]', f"needs {THREE}; there are 2 here")),
        ({"at": ["0"] * 4}, ("at", '["0", "0", "0", "0"]', f"needs {THREE}; there are 4 here")),
        ({"at": "0"}, ("at", '"0"', f"needs {THREE}")),
        (
            {"at": ["0", "0", "1 s"]},
            ("at.2", '"1 s"', f"needs {A_LENGTH} ('s' is a unit of time)"),
        ),
        (
            {"along": [0, 0, 0]},
            ("along", "[0, 0, 0]", "must have at least one component other than 0"),
        ),
        (
            {"along": [0, "1", 0]},
            ("along.1", '"1"', "needs a plain number, without quotes or unit"),
        ),
        # headers
        (
            {"part": RODS},
            ("part", "", "there may be several: write the header as [[part]], in double brackets"),
        ),
        (
            {"ring": [RING]},
            ("ring", "", "there is only one: write the header as [ring], in single brackets"),
        ),
        # numbers, words, text
        ({"number": 1.5}, ("number", "1.5", "needs a whole number, without decimals")),
        ({"number": "4"}, ("number", '"4"', "needs a whole number, without quotes or unit")),
        ({"number": True}, ("number", "true", "needs a whole number")),
        (
            {"number": 10**400},
            ("number", "a whole number of more than 64 bits", "must lie between -2^63 and 2^63"),
        ),
        ({"angle": math.inf}, ("angle", "inf", "needs a finite number")),
        ({"angle": math.nan}, ("angle", "nan", "needs a finite number")),
        ({"angle": 3.0}, ("angle", "3.0", "must be at least -1 and at most 2")),
        ({"runs": "yes"}, ("runs", '"yes"', "needs true or false")),
        ({"runs": 1}, ("runs", "1", "needs true or false")),
        ({"title": 3}, ("title", "3", "needs text in quotes")),
        ({"title": ""}, ("title", '""', "needs 1 to 60 characters on one line")),
        ({"title": "a\nb"}, ("title", '"a\\nb"', "needs 1 to 60 characters on one line")),
        # between keys
        (
            {"ring": RING | {"inner": "3 mm"}},
            ("ring", "", "`outer` must be larger than `inner`"),
        ),
    ],
)
def test_a_fault_names_the_key_the_value_and_what_is_needed(
    data: Any, expected: tuple[str, str, str]
) -> None:
    assert [expected] == faults(data)


def test_all_faults_of_a_table_are_told_at_once() -> None:
    found = faults({"number": "x", "part": [{"kind": "rods"}, RODS | {"radius": 1}], "zz": 0})
    assert ["part.0.radius", "part.1.radius", "number", "zz"] == [path for path, _, _ in found]


def test_a_missing_key_is_not_told_beside_the_misspelt_one_it_is_taken_for() -> None:
    assert [("part.0.radus", "", 'unknown key; did you mean "radius"?')] == faults(
        {"part": [{"kind": "rods", "radus": "1 mm"}]}
    )


def test_long_values_are_shortened_to_one_line() -> None:
    [(_, found, _)] = faults({"title": "x" * 10_000})
    assert found.startswith('"xxx')
    assert found.endswith(" ...")
    assert len(found) == 60


def test_a_table_without_faults_is_read_and_has_none() -> None:
    machine, found = read_form(Machine, {"part": [RODS | {"voltage": _SINE}], "step": "2 ms"})
    assert [] == found
    assert machine is not None
    assert 0.002 == machine.step
    assert isinstance(machine.part[0].voltage, Sine)


_SINE = {"amplitude": "1 V", "frequency": "1 MHz"}


def test_a_value_that_no_number_can_hold_is_a_fault_and_no_exception() -> None:
    for text in ("1e999999999 m", "1e-999999999999999999999 m", "9" * 90 + "e999999 m"):
        form, found = read_form(Machine, {"longest": text})
        assert (form is None) == bool(found)


@pytest.mark.parametrize(
    ("word", "known", "expected"),
    [
        ("radus", ("radius", "voltage"), "radius"),
        ("RADIUS", ("radius", "voltage"), "radius"),
        ("axial frequency", ("axial_frequency", "value"), "axial_frequency"),
        ("zzz", ("radius", "voltage"), None),
        ("x" * 100_000, ("radius",), None),
        ("radius", (), None),
    ],
)
def test_the_nearest_known_word_is_found_where_there_is_one(
    word: str, known: tuple[str, ...], expected: str | None
) -> None:
    assert expected == nearest(word, known)


def test_faults_are_plain_values() -> None:
    assert Fault(("a", 0), "1", "needs 2") == Fault(("a", 0), "1", "needs 2")
