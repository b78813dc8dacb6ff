"""What a ``[limit]`` asks for, in numbers: the range with its places, threshold and resolution.

A place is a part of the way from one end of the range to the other: 0 to 1 by differences, or by
logarithms. Places are kept on a lattice of 2^-24 of the range, or on the whole numbers there, so
that the same place is the same run whatever way a search came to it.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np

from driftwell.answers.form import QuestionForm
from driftwell.answers.table import QUESTION_KINDS
from driftwell.forms import units
from driftwell.forms.declared import Dimensioned, kind_name
from driftwell.forms.faults import Fault
from driftwell.forms.held import read_dimensioned
from driftwell.forms.wording import as_found
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import path_of, setting_text
from driftwell.study.axis import Range, held_by, range_of
from driftwell.study.form import Vary
from driftwell.study.limit_form import Limit

LATTICE = 2**24
_LOG_FROM = 10.0
"""Ratio of the ends from which on `auto` counts ratios."""
_PLAIN = "1"


@dataclass(frozen=True, slots=True)
class Place:
    """A value of the key.

    lattice : its number among all places of the range
    share : 0 to 1, of the way; value : SI
    setting : ``key=value`` that puts it into the scenario
    """

    lattice: int
    share: float
    value: float
    setting: str


@dataclass(frozen=True, slots=True)
class Resolution:
    """How wide an interval may be: `size` in SI, or a part of the value where `relative`."""

    size: float
    relative: bool

    def at(self, value: float) -> float:
        """The width at a value."""
        return self.size * abs(value) if self.relative else self.size


@dataclass(frozen=True, slots=True)
class Asked:
    """A limit that can be searched for.

    range : of the key
    unit : SI unit of the key; "1": plain numbers
    threshold : in the unit of the answer
    answer_unit : that unit, as the question's kind has it
    """

    form: Limit
    range: Range
    unit: str
    threshold: float
    answer_unit: str
    resolution: Resolution

    @property
    def log(self) -> bool:
        """Whether ratios count."""
        return self.range.log

    @property
    def whole(self) -> bool:
        """Whether the key holds whole numbers."""
        number = self.range.held.number
        return self.range.held.quantity is None and number is not None and number.whole

    def place(self, share: float) -> Place:
        """The place nearest to a part of the way."""
        lattice = min(max(round(share * LATTICE), 0), LATTICE)
        raw = self.range.steps([lattice / LATTICE]).raw[0]
        value = float(self.range.held.value(raw))
        at = lattice / LATTICE
        if self.whole:
            at, lattice = self.share(value), round(value)
        return Place(lattice, at, value, setting_text(self.form.setting, raw))

    def share(self, value: float) -> float:
        """How far along the way a value is."""
        first, last = self.range.first, self.range.last
        if self.log:
            return math.log(value / first) / math.log(last / first)
        return (value - first) / (last - first)

    def value(self, share: float) -> float:
        """The value at a part of the way, SI; not rounded to what a key may hold."""
        first, last = self.range.first, self.range.last
        if self.log:
            return first * math.exp(share * math.log(last / first))
        return (1.0 - share) * first + share * last

    def seed(self, own: int, place: Place, replica: int) -> int:
        """The seed of a run: each place and replica has draws of its own, the same each time."""
        sequence = np.random.SeedSequence(entropy=own, spawn_key=(place.lattice, replica))
        return int(sequence.generate_state(1, np.uint64)[0]) >> 11

    def first_places(self) -> list[Place]:
        """The places to begin with; fewer where the range has fewer whole numbers."""
        count = self.form.points
        places = [self.place(k / (count - 1)) for k in range(count)]
        return list({place.lattice: place for place in places}.values())


def asked_limit(
    form: Limit, data: Mapping[str, Any], settings: Sequence[str] = ()
) -> tuple[Asked | None, list[Fault]]:
    """What the ``[limit]`` asks for, or all its faults, with paths in the study's raw table.

    data : the scenario's raw table, with all `settings` put in
    """
    faults = list(_answer_faults(form, data))
    question = None if faults else _question(form.answer, data)
    threshold = 0.0
    if question is not None:
        found = _threshold(form.crosses, question)
        if isinstance(found, str):
            faults.append(Fault(("limit", "crosses"), "", found))
        else:
            threshold = found
    whole = _range(form, data)
    if isinstance(whole, list):
        return None, faults + whole
    resolution = _resolution(form.resolution, whole)
    if isinstance(resolution, str):
        faults.append(Fault(("limit", "resolution"), "", resolution))
    if faults or question is None or isinstance(resolution, str):
        return None, faults
    return Asked(form, whole, whole.held.unit, threshold, question.unit, resolution), []


def as_vary(form: Limit, log: bool) -> Vary:
    """The first places as a ``[[vary]]``, for all that is checked of one."""
    return Vary.model_validate(
        {
            "key": form.setting,
            "from": form.first,
            "to": form.last,
            "points": form.points,
            "spacing": "log" if log else "even",
        }
    )


def _range(form: Limit, data: Mapping[str, Any]) -> Range | list[Fault]:
    path = ("limit",)
    try:
        held = held_by(path_of(form.setting, data, Scenario), data)
    except LookupError as fault:
        return [Fault((*path, "key"), "", str(fault))]
    if held.path == ("seed",):
        return [Fault((*path, "key"), "", "a seed has no limit; name what is to be limited")]
    if held.quantity is None and held.number is None and not held.unknown:
        text = "holds no number or quantity, so that nothing lies between two of its values"
        return [Fault((*path, "key"), "", f"{text}; name a key that does")]
    found = range_of(as_vary(form, form.spacing == "log"), held, path)
    if isinstance(found, list):
        return found
    if form.spacing == "auto" and found.first * found.last > 0.0:
        ratio = found.last / found.first
        found = replace(found, log=max(ratio, 1.0 / ratio) >= _LOG_FROM)
    return found


def _answer_faults(form: Limit, data: Mapping[str, Any]) -> Iterator[Fault]:
    names = [each.get("name") for each in _questions(data)]
    if form.answer not in names:
        known = ", ".join(as_found(name) for name in names if isinstance(name, str))
        text = f"the scenario asks no such question; it asks {known or 'none'}"
        yield Fault(("limit", "answer"), "", text)


def _questions(data: Mapping[str, Any]) -> list[Mapping[str, Any]]:
    found = data.get("question", [])
    return [each for each in found if isinstance(each, dict)] if isinstance(found, list) else []


def _question(name: str, data: Mapping[str, Any]) -> type[QuestionForm] | None:
    """The kind of the question; None where it is of no kind, which the trial will tell."""
    ask = next(each.get("ask") for each in _questions(data) if each.get("name") == name)
    return next((kind for kind in QUESTION_KINDS if kind_name(kind, "ask") == ask), None)


def _threshold(crosses: float | str, question: type[QuestionForm]) -> float | str:
    """In the question's unit, or what is needed instead."""
    if question.unit == _PLAIN:
        if isinstance(crosses, str):
            return "the answer is a plain number; needs one, without quotes or unit"
        return float(crosses)
    wanted = f"the answer is in {question.unit}; needs a number and its unit in quotes"
    if not isinstance(crosses, str):
        return wanted
    try:
        example = f"1 {question.unit}"
        return read_dimensioned(Dimensioned("a value", question.unit, example, ()), crosses)
    except (ValueError, LookupError):
        return f"{wanted}, of that dimension"


def _resolution(asked: float | str, whole: Range) -> Resolution | str:
    """How wide an interval may be, or what is needed instead."""
    held = whole.held
    if isinstance(asked, str) and asked.strip().endswith("%"):
        parts = units.split(asked.strip().removesuffix("%").strip() or "x")
        share = float(parts[0]) / 100.0 if parts is not None and not parts[1] else 0.0
        if not 0.0 < share < 1.0:
            return 'needs a part above 0 and below 100 %, such as "1 %"'
        return Resolution(share, True)
    if held.quantity is None:
        if isinstance(asked, str) or not asked > 0.0:
            return 'needs a number above 0, or a part of the value such as "1 %"'
        return Resolution(float(asked), False)
    wanted = f'needs a part of the value such as "1 %", or a width in {held.quantity.si_unit}'
    if not isinstance(asked, str):
        return wanted
    try:
        one, zero = (read_dimensioned(held.quantity, text) for text in (asked, f"0 {_unit(asked)}"))
    except ValueError:
        return wanted
    return Resolution(one - zero, False) if one > zero else f"{wanted}, above 0"


def _unit(text: str) -> str:
    parts = units.split(text)
    return "" if parts is None else parts[1]
