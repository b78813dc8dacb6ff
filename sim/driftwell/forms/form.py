"""A form: the options of one part, each with its meaning, unit, default and bounds.

The scenario reader, the JSON Schema for editors and the reference page all come from these
declarations, so that a key has one meaning, one default and one line of help.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import Annotated, Any, Literal, Union

from pydantic import (
    BaseModel,
    ConfigDict,
    Discriminator,
    Field,
    GetCoreSchemaHandler,
    Tag,
    model_validator,
)
from pydantic.fields import PydanticUndefined  # type: ignore[attr-defined]
from pydantic_core import PydanticCustomError, core_schema

checked = model_validator(mode="after")
"""Decorator of a form's method that checks its keys against each other and returns `self`."""


def refuse(needed: str) -> PydanticCustomError:
    """The fault to raise in a :data:`checked` method: says what the keys must be."""
    return PydanticCustomError("order", "{needed}", {"needed": needed})


class Form(BaseModel):
    """Base of every declared set of keys: frozen, unknown keys refused, numbers finite."""

    model_config = ConfigDict(frozen=True, extra="forbid", allow_inf_nan=False)


def key(
    meaning: str, *, default: Any = PydanticUndefined, example: Any = None, named: str | None = None
) -> Any:
    """Declare a key: its meaning in a line, its default (left out: required), an example.

    named : the key in the file, where it cannot be the attribute's own name (such as ``from``)
    """
    examples = None if example is None else [example]
    return Field(default, alias=named, description=meaning, examples=examples)


def one_of(kinds: tuple[type[Form], ...], by: str = "kind") -> Any:
    """The type "one of these forms, told apart by their key `kind`" (or the key `by`)."""
    if len(kinds) == 1:
        return kinds[0]
    return Annotated[Union[kinds], Discriminator(by)]  # noqa: UP007 - built from a table


@dataclass(frozen=True, slots=True)
class Bound:
    """The range of a number (SI where it has a unit); a value outside is a fault."""

    above: float | None = None
    least: float | None = None
    below: float | None = None
    most: float | None = None
    other_than: float | None = None

    def check(self, value: float) -> float:
        """`value`, when it lies in the range."""
        if (
            (self.above is not None and not value > self.above)
            or (self.least is not None and not value >= self.least)
            or (self.below is not None and not value < self.below)
            or (self.most is not None and not value <= self.most)
            or (self.other_than is not None and value == self.other_than)
            or not math.isfinite(value)
        ):
            raise PydanticCustomError("bound", "must be {range}", {"range": self.words()})
        return value

    def words(self) -> str:
        """The range in words, e.g. ``greater than 0``."""
        parts = [
            f"{word} {limit:g}"
            for word, limit in (
                ("greater than", self.above),
                ("at least", self.least),
                ("less than", self.below),
                ("at most", self.most),
                ("other than", self.other_than),
            )
            if limit is not None
        ]
        return " and ".join(parts)

    def __get_pydantic_core_schema__(
        self, source: Any, handler: GetCoreSchemaHandler
    ) -> core_schema.CoreSchema:
        return core_schema.no_info_after_validator_function(self.check, handler(source))


def or_word(word: str | tuple[str, ...], kind: Any) -> Any:
    """The type "this word (or one of these), or a `kind`", e.g. ``"auto"`` or a time."""
    words = (word,) if isinstance(word, str) else word

    def which(value: Any) -> str:
        return "word" if isinstance(value, str) and value in words else "value"

    return Annotated[
        Union[Annotated[Literal[words], Tag("word")], Annotated[kind, Tag("value")]],  # noqa: UP007
        Discriminator(which),
    ]


def row_or_table(row: Any, table: Any) -> Any:
    """The type "a list such as `row`, or a table such as `table`"."""

    def which(value: Any) -> str:
        return "row" if isinstance(value, list | tuple) else "table"

    return Annotated[
        Union[Annotated[row, Tag("row")], Annotated[table, Tag("table")]],  # noqa: UP007
        Discriminator(which),
    ]


def per_axis(kind: Any, axes: int = 3) -> Any:
    """The type "one `kind` for all axes, or a list with one for each", see :func:`on_each_axis`."""

    def which(value: Any) -> str:
        return "axes" if isinstance(value, list | tuple) else "one"

    several: Any = tuple.__class_getitem__((kind,) * axes)
    return Annotated[
        Union[Annotated[kind, Tag("one")], Annotated[several, Tag("axes")]],  # noqa: UP007
        Discriminator(which),
    ]


def on_each_axis(value: float | tuple[float, ...], axes: int = 3) -> tuple[float, ...]:
    """A value read as :func:`per_axis`, one number for each axis."""
    return value if isinstance(value, tuple) else (value,) * axes
