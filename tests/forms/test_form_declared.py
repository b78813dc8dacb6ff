"""What a form declares is read from its annotations, whatever they are made of."""

from __future__ import annotations

from typing import Literal

import pytest

from driftwell.forms import (
    Bound,
    Count,
    Form,
    Length,
    Name,
    Point,
    Positive,
    Time,
    key,
    one_of,
    or_word,
    per_axis,
)
from driftwell.forms.declared import (
    Choice,
    Dimensioned,
    Flag,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    about,
    declared_keys,
    forms_within,
    kind_name,
)
from driftwell.forms.waveforms import VoltageWave
from driftwell.scenario.model import Scenario

ABOVE_ZERO = (Bound(above=0.0),)
A_LENGTH = Dimensioned("a length", "m", "3.5 mm")


class Disc(Form):
    """A disc.

    It has
    two sides.
    """

    kind: Literal["disc"]
    radius: Positive[Length] = key("how wide", example="2 mm")


class Sheet(Form):
    """A sheet."""

    kind: Literal["sheet"]
    sides: Positive[Count] = key("how many", default=4)


AnyPart = one_of((Disc, Sheet))
StepTime = or_word("auto", Positive[Time])
Size = per_axis(Length, 2)


class Machine(Form):
    """A machine."""

    name: Name
    at: Point = key("where", default=(0.0, 0.0, 0.0))
    parts: tuple[AnyPart, ...] = key("what it is made of", default=())  # type: ignore[valid-type]
    by_name: dict[Name, Disc] = key("spare discs", default={})
    step: StepTime = key("how long", default="auto")  # type: ignore[valid-type]
    size: Size = key("how large")  # type: ignore[valid-type]
    voltage: VoltageWave = key("how hard")
    spare: Disc | None = key("left out: none", default=None)
    running: bool = key("whether it runs", default=False)
    colour: Literal["red", "blue"] = key("its colour", default="red")


@pytest.mark.parametrize(
    ("name", "expected"),
    [
        ("name", Text(1, 60)),
        ("at", Row((A_LENGTH,) * 3)),
        ("parts", Several(Choice((("disc", Keys(Disc)), ("sheet", Keys(Sheet))), "kind"))),
        ("by_name", Named(Keys(Disc))),
        (
            "step",
            Choice(
                (
                    ("word", Words(("auto",))),
                    ("value", Dimensioned("a time", "s", "2 ms", ABOVE_ZERO)),
                ),
                None,
            ),
        ),
        ("size", Choice((("one", A_LENGTH), ("axes", Row((A_LENGTH, A_LENGTH)))), None)),
        ("spare", Keys(Disc)),
        ("running", Flag()),
        ("colour", Words(("red", "blue"))),
    ],
)
def test_each_sort_of_annotation_is_described_by_what_it_may_hold(
    name: str, expected: object
) -> None:
    assert expected == declared_keys(Machine)[name].holds


def test_a_waveform_is_a_constant_or_one_of_the_kinds_in_time() -> None:
    holds = declared_keys(Machine)["voltage"].holds
    assert isinstance(holds, Choice)
    assert "kind" == holds.by
    assert ["sine", "ramp", "step", "pulses", "table", "noise"] == [name for name, _ in holds.kinds]
    assert Dimensioned("a voltage", "V", "180 V") == holds.option("constant")
    assert holds.option("square") is None


def test_a_key_knows_its_help_its_default_and_its_example() -> None:
    radius, sides = declared_keys(Disc)["radius"], declared_keys(Sheet)["sides"]
    assert ("how wide", True, None, "2 mm") == (
        radius.help,
        radius.required,
        radius.default,
        radius.example,
    )
    assert ("how many", False, 4, None) == (
        sides.help,
        sides.required,
        sides.default,
        sides.example,
    )
    assert Number(True, ABOVE_ZERO) == sides.holds


def test_a_form_is_described_by_the_paragraphs_of_its_docstring() -> None:
    assert ("A disc.", "It has two sides.") == about(Disc)


def test_a_kind_is_the_one_word_its_key_may_hold() -> None:
    assert "disc" == kind_name(Disc)
    assert kind_name(Machine) is None
    assert kind_name(Disc, "ask") is None


def test_forms_within_a_form_are_found_at_any_depth_once() -> None:
    found = list(forms_within(Keys(Machine)))
    assert [Machine, Disc, Sheet] == [form for form in found if form in (Machine, Disc, Sheet)]
    assert len(set(found)) == len(found)


def test_types_that_cannot_be_told_apart_are_refused() -> None:
    class Unclear(Form):
        """Unclear."""

        value: int | str

    with pytest.raises(TypeError, match="must be told apart"):
        declared_keys(Unclear)


def test_every_key_of_a_scenario_is_described_and_has_one_line_of_help() -> None:
    without_help = [
        f"{form.__name__}.{name}"
        for form in forms_within(Keys(Scenario))
        for name, declared in declared_keys(form).items()
        if name not in ("kind", "ask") and (not declared.help or "\n" in declared.help)
    ]
    assert [] == without_help
