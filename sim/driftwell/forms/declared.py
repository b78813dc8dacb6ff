"""What a form declares, as plain values: read once from its annotations, used in many places.

Faults, the JSON Schema, the reference page and the settings of the command line all ask the same
two questions of a form: which keys are there, and what may each of them hold.
"""

from __future__ import annotations

import inspect
import types
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from typing import Annotated, Any, Literal, Union, get_args, get_origin

from pydantic import Discriminator, StringConstraints, Tag
from pydantic.fields import FieldInfo

from driftwell.forms.form import Bound, Form
from driftwell.forms.quantities import Quantity, Whatever


@dataclass(frozen=True, slots=True)
class Dimensioned:
    """A number with a unit, e.g. ``"3.5 mm"``."""

    name: str
    si_unit: str
    example: str
    bounds: tuple[Bound, ...] = ()


@dataclass(frozen=True, slots=True)
class Number:
    """A plain number; `whole`: without decimals."""

    whole: bool
    bounds: tuple[Bound, ...] = ()


@dataclass(frozen=True, slots=True)
class Text:
    """Text of a length between `least` and `most` characters."""

    least: int = 0
    most: int | None = None


@dataclass(frozen=True, slots=True)
class Flag:
    """true or false."""


@dataclass(frozen=True, slots=True)
class Anything:
    """Any value a file can hold."""


@dataclass(frozen=True, slots=True)
class Words:
    """One of a few words."""

    words: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Row:
    """A list of fixed length, each place with its own meaning."""

    entries: tuple[Declared, ...]


@dataclass(frozen=True, slots=True)
class Several:
    """A list of any length."""

    entry: Declared


@dataclass(frozen=True, slots=True)
class Named:
    """A table whose keys the user chooses."""

    entry: Declared


@dataclass(frozen=True, slots=True)
class Keys:
    """A table with the keys of a form."""

    form: type[Form]


@dataclass(frozen=True, slots=True)
class Choice:
    """One of several, told apart by a tag the validation library puts into its paths.

    Where the options are forms with a key `kind` (or `ask`), `by` is that key and the tags are its
    words; where it is None the tags never appear in a file.
    """

    options: tuple[tuple[str, Declared], ...]
    by: str | None

    def option(self, tag: object) -> Declared | None:
        """What goes by `tag`."""
        return next((option for name, option in self.options if name == tag), None)

    @property
    def kinds(self) -> tuple[tuple[str, Keys], ...]:
        """The options that are forms told apart by the key `by`."""
        return tuple(
            (name, option)
            for name, option in self.options
            if isinstance(option, Keys) and self.by is not None
        )


Declared = (
    Dimensioned | Number | Text | Flag | Anything | Words | Row | Several | Named | Keys | Choice
)


@dataclass(frozen=True, slots=True)
class DeclaredKey:
    """One key of a form: its help, what it may hold, whether it may be left out and as what.

    name : as a file has it
    attribute : as the form has it; another word only where the name is none Python can use
    """

    name: str
    attribute: str
    help: str
    holds: Declared
    required: bool
    default: Any
    example: Any


@lru_cache(maxsize=512)
def declared_keys(form: type[Form]) -> dict[str, DeclaredKey]:
    """The keys of a form by name, in the order of their declaration."""
    keys = (_declared_key(name, info) for name, info in form.model_fields.items())
    return {key.name: key for key in keys}


def about(form: type[Form]) -> tuple[str, ...]:
    """The paragraphs of a form's docstring, each on one line."""
    paragraphs = (inspect.getdoc(form) or "").split("\n\n")
    return tuple(" ".join(paragraph.split()) for paragraph in paragraphs)


def kind_name(form: type[Form], by: str = "kind") -> str | None:
    """The word that the key `by` must hold to mean this form; None where it has no such key."""
    declared = declared_keys(form).get(by)
    if declared is None or not isinstance(declared.holds, Words):
        return None
    return declared.holds.words[0] if len(declared.holds.words) == 1 else None


def forms_within(declared: Declared) -> Iterator[type[Form]]:
    """All forms that `declared` may hold, at any depth, each once, outermost first."""
    seen: set[type[Form]] = set()
    waiting = [declared]
    while waiting:
        match waiting.pop(0):
            case Keys(form) if form not in seen:
                seen.add(form)
                yield form
                waiting.extend(key.holds for key in declared_keys(form).values())
            case Row(entries):
                waiting.extend(entries)
            case Several(entry) | Named(entry):
                waiting.append(entry)
            case Choice(options):
                waiting.extend(option for _, option in options)
            case _:
                pass


def _declared_key(name: str, info: FieldInfo) -> DeclaredKey:
    required = info.is_required()
    examples = info.examples or [None]
    return DeclaredKey(
        info.alias or name,
        name,
        info.description or "",
        _declared(info.annotation, tuple(info.metadata)),
        required,
        None if required else info.get_default(call_default_factory=True),
        examples[0],
    )


def _declared(annotation: Any, marks: tuple[Any, ...] = ()) -> Declared:
    """Read one annotation; `marks` are the annotations around it."""
    origin, args = get_origin(annotation), get_args(annotation)
    if origin is Annotated:
        return _declared(args[0], (*args[1:], *marks))
    if origin in (Union, types.UnionType):
        return _union(args, marks)
    if origin is Literal:
        return Words(tuple(str(word) for word in args))
    if origin is tuple:
        if len(args) == 2 and args[1] is Ellipsis:
            return Several(_declared(args[0]))
        return Row(tuple(_declared(part) for part in args))
    if origin is list:
        return Several(_declared(args[0]))
    if origin is dict:
        return Named(_declared(args[1]))
    if isinstance(annotation, type) and issubclass(annotation, Form):
        return Keys(annotation)
    return _single(annotation, marks)


def _single(annotation: Any, marks: tuple[Any, ...]) -> Declared:
    bounds = tuple(mark for mark in marks if isinstance(mark, Bound))
    quantity = next((mark for mark in marks if isinstance(mark, Quantity)), None)
    if quantity is not None:
        return Dimensioned(quantity.name, quantity.si_unit, quantity.example, bounds)
    if any(isinstance(mark, Whatever) for mark in marks):
        return Anything()
    if annotation is bool:
        return Flag()
    if annotation in (float, int):
        return Number(annotation is int, bounds)
    if annotation is str:
        limits = next((mark for mark in marks if isinstance(mark, StringConstraints)), None)
        if limits is None:
            return Text()
        return Text(limits.min_length or 0, limits.max_length)
    raise TypeError(f"a key of a form cannot hold {annotation!r}")


def _union(args: tuple[Any, ...], marks: tuple[Any, ...]) -> Declared:
    parts = [part for part in args if part is not type(None)]
    if len(parts) == 1:
        return _declared(parts[0], marks)
    discriminator = next((mark for mark in marks if isinstance(mark, Discriminator)), None)
    if discriminator is None:
        raise TypeError(f"the types {parts} must be told apart by a discriminator")
    by = discriminator.discriminator
    if isinstance(by, str):
        options = [(kind_name(_form_of(part), by) or "", _declared(part)) for part in parts]
        return Choice(tuple(options), by)
    options = [(_tag_of(part), _declared(part)) for part in parts]
    names = {name for name, option in options if _is_kind(name, option)}
    return Choice(tuple(options), "kind" if names else None)


def _is_kind(tag: str, option: Declared) -> bool:
    return isinstance(option, Keys) and kind_name(option.form) == tag


def _form_of(annotation: Any) -> Any:
    return get_args(annotation)[0] if get_origin(annotation) is Annotated else annotation


def _tag_of(annotation: Any) -> str:
    marks = get_args(annotation)[1:] if get_origin(annotation) is Annotated else ()
    tag = next((mark for mark in marks if isinstance(mark, Tag)), None)
    if tag is None:
        raise TypeError(f"the type {annotation} in a choice needs a tag")
    return tag.tag
