"""A formula with its source and range, and a value worked out from it."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from driftwell.answers.form import QuestionForm
from driftwell.hand.scene import Scene


@dataclass(frozen=True, slots=True)
class Formula:
    """A published formula.

    name : the usual one; equation : as text
    source : where it is published, and whether that was remembered
    range : where it holds
    """

    name: str
    equation: str
    source: str
    range: str


@dataclass(frozen=True, slots=True)
class HandValue:
    """A value worked out by hand.

    what : the quantity, and of whom; value : in `unit`
    inside : whether the scenario lies within the formula's range; why : in words
    """

    formula: Formula
    what: str
    value: float
    unit: str
    inside: bool
    why: str


Values = Iterator[HandValue]


def _unasked(question: QuestionForm, scene: Scene) -> HandValue | None:
    """No question asks for it."""
    return None


@dataclass(frozen=True, slots=True)
class HandKind:
    """One kind of hand calculation.

    formulas : those it works with
    values : all it has to say of a scene; nothing where the scene holds nothing it is about
    answer : what it says to a question; None where the question asks for something else, or
        where a comparison would mislead
    """

    formulas: tuple[Formula, ...]
    values: Callable[[Scene], Values]
    answer: Callable[[QuestionForm, Scene], HandValue | None] = _unasked
