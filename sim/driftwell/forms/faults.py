"""Faults of a form in words: which key, what was found there, what is needed.

All faults of a table are found at once. Whatever the validation library says of a value is put
into the words of the declarations (:mod:`driftwell.forms.declared`), so that a message names the
nearest valid key, the kinds there are, the unit that is wanted.
"""

from __future__ import annotations

import difflib
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, TypeVar

from pydantic import ValidationError

from driftwell.forms.declared import (
    Choice,
    Declared,
    Dimensioned,
    Keys,
    Named,
    Number,
    Row,
    Several,
    Text,
    Words,
    declared_keys,
)
from driftwell.forms.form import Form
from driftwell.forms.wording import as_found, bound_words, either, needed

Path = tuple[str | int, ...]
F = TypeVar("F", bound=Form)

_OURS = frozenset({"quantity", "order", "direction", "value_error", "assertion_error"})


@dataclass(frozen=True, slots=True)
class Fault:
    """One fault: the path of the key, the value found (empty where none), what is needed."""

    path: Path
    found: str
    needed: str


def read_form(form: type[F], data: Any) -> tuple[F | None, list[Fault]]:
    """Read a raw table as `form`: the form and no faults, or None and all faults."""
    too_large = [
        Fault(path, as_found(value), "must lie between -2^63 and 2^63")
        for path, value in _numbers(data)
        if not -(2**63) <= value < 2**63
    ]
    if too_large:
        return None, too_large
    try:
        return form.model_validate(data), []
    except ValidationError as error:
        details = error.errors(include_url=False, include_context=True, include_input=False)
        return None, _told_once(_Reading(Keys(form), data).fault(detail) for detail in details)
    except (ArithmeticError, RecursionError) as error:
        return None, [Fault((), "", f"holds a value beyond what can be worked with ({error})")]


def nearest(word: str, known: Iterable[str]) -> str | None:
    """The known word that `word` was probably meant to be, or None."""
    plain = {_plain(name): name for name in known}
    close = difflib.get_close_matches(_plain(word)[:80], plain, n=1, cutoff=0.6)
    return plain[close[0]] if close else None


def _plain(word: str) -> str:
    return word.lower().replace("_", "-").replace(" ", "-")


def _numbers(data: Any) -> Iterable[tuple[Path, int]]:
    """All whole numbers in raw data, with their paths."""
    waiting: list[tuple[Path, Any]] = [((), data)]
    while waiting:
        path, value = waiting.pop()
        if isinstance(value, Mapping):
            waiting.extend(((*path, name), part) for name, part in value.items())
        elif isinstance(value, list | tuple):
            waiting.extend(((*path, i), part) for i, part in enumerate(value))
        elif isinstance(value, int):
            yield path, value


def _told_once(faults: Iterable[Fault]) -> list[Fault]:
    """Each fault once; a missing key is not told where a misspelt one is taken for it."""
    once = dict.fromkeys(faults)
    meant = {
        (*fault.path[:-1], fault.needed.split('"')[1])
        for fault in once
        if fault.needed.startswith(_MEANT)
    }
    return [
        fault for fault in once if not (fault.path in meant and fault.needed.startswith(_MISSING))
    ]


_NAME = Text(1, 60)
_MEANT = "unknown key; did you mean"
_EVERYWHERE = ("name", "kind", "ask")
_BRACKETS = ("there may be several", "there is only one")
_PLAIN = (Dimensioned, Number, Text)
_MISSING = "missing; needs"


@dataclass(frozen=True, slots=True)
class _Reading:
    """A table as it was declared and as it was found."""

    declared: Declared
    data: Any

    def fault(self, detail: Mapping[str, Any]) -> Fault:
        """The fault for one detail of the validation library."""
        kind, context = str(detail["type"]), detail.get("ctx", {})
        path, holders = self._walk(detail["loc"])
        declared, value = holders[-1], _at(self.data, path)
        found = "" if value is _NOTHING else as_found(value)
        if detail["loc"] and detail["loc"][-1] == "[key]":
            return Fault(path, "", f"this name needs {_text_words(declared)}")
        if kind == "extra_forbidden":
            return Fault(path, "", _unknown_key(str(path[-1]), holders[-2], self, path))
        if kind == "missing" and isinstance(holders[-2], Row):
            return self._wrong_length(path[:-1], holders[-2])
        if kind == "missing":
            return Fault(path, "", f"{_MISSING} {self._wanted(path, holders, True)}")
        if isinstance(declared, Choice) and _has_kinds(declared):
            return _unknown_kind(path, declared, value)
        if kind in ("too_long", "too_short") and isinstance(declared, Row):
            return self._wrong_length(path, declared)
        if kind == "bound":
            return Fault(path, found, f"must be {_bounds(declared, context)}")
        if kind == "quantity":
            why = f" ({context['why']})" if context.get("why") else ""
            return Fault(path, found, f"needs {self._wanted(path, holders, False)}{why}")
        if kind in _OURS:
            text = str(detail["msg"])
            for prefix in ("Value error, ", "Assertion failed, "):
                text = text.removeprefix(prefix)
            return Fault(path, "" if isinstance(value, Mapping) else found, text)
        text = _wrong_type(path, declared, value, kind)
        return Fault(path, "" if text.startswith(_BRACKETS) else found, text)

    def _walk(self, location: Sequence[str | int]) -> tuple[Path, list[Declared | None]]:
        """The user's own path, without tags, and what was declared at each place along it."""
        path: list[str | int] = []
        holders: list[Declared | None] = [self.declared]
        for part in location:
            if part == "[key]":
                holders[-1] = _NAME
                break
            match holders[-1]:
                case Choice() as choice:
                    holders[-1] = choice.option(part)
                    continue
                case Keys(form):
                    key = declared_keys(form).get(str(part))
                    inner = None if key is None else key.holds
                case Row(entries):
                    inner = entries[part] if isinstance(part, int) and part < len(entries) else None
                case Several(entry):
                    inner = entry
                case Named(entry):
                    inner = entry
                case _:
                    inner = None
            path.append(part)
            holders.append(inner)
        return tuple(path), holders

    def _wrong_length(self, path: Path, row: Row) -> Fault:
        value = _at(self.data, path)
        size = len(value) if isinstance(value, list | tuple) else 0
        return Fault(path, as_found(value), f"needs {needed(row)}; there are {size} here")

    def _wanted(self, path: Path, holders: Sequence[Declared | None], all_kinds: bool) -> str:
        """What the key at `path` may hold, with the key's own example where it has one.

        Kinds of tables it may hold as well are told where `all_kinds` is true.
        """
        holder = holders[-2] if len(holders) > 1 else None
        key = declared_keys(holder.form).get(str(path[-1])) if isinstance(holder, Keys) else None
        declared = holders[-1]
        if key is not None and (all_kinds or not _has_kinds(key.holds)):
            declared = key.holds
        if declared is None:
            return "another value"
        return needed(declared, example=None if key is None else key.example)


def _has_kinds(declared: Declared) -> bool:
    return isinstance(declared, Choice) and bool(declared.kinds)


class _Nothing:
    """Where a path leads to no value."""


_NOTHING = _Nothing()


def _at(data: Any, path: Path) -> Any:
    for part in path:
        if isinstance(data, str):
            return _NOTHING
        try:
            data = data[part]
        except (LookupError, TypeError):
            return _NOTHING
    return data


def _unknown_key(word: str, holder: Declared | None, reading: _Reading, path: Path) -> str:
    if not isinstance(holder, Keys):
        return "unknown key"
    keys = declared_keys(holder.form)
    top = declared_keys(reading.declared.form) if isinstance(reading.declared, Keys) else {}
    for name, key in keys.items():
        if word not in _EVERYWHERE and any(
            word in declared_keys(form) for form in _forms_at(key.holds)
        ):
            return f'unknown key here; did you mean "{name}.{word}"?'
    if len(path) > 1 and word in top and isinstance(top[word].holds, _PLAIN):
        return f'unknown key here; "{word}" belongs at the top of the file, before any [table]'
    meant = nearest(word, keys)
    if meant is not None:
        return f'{_MEANT} "{meant}"?'
    for name, key in top.items():
        if isinstance(key.holds, Keys) and word in declared_keys(key.holds.form):
            return f'unknown key here; "{word}" belongs in [{name}]'
    return "unknown key; the keys here are " + ", ".join(keys)


def _forms_at(declared: Declared) -> list[type[Form]]:
    """The forms a key may hold directly."""
    match declared:
        case Keys(form):
            return [form]
        case Choice(options):
            return [form for _, option in options for form in _forms_at(option)]
        case _:
            return []


def _unknown_kind(path: Path, declared: Choice, value: Any) -> Fault:
    by = declared.by or "kind"
    kinds = [name for name, _ in declared.kinds]
    if not isinstance(value, Mapping):
        return Fault(path, as_found(value), f"needs {needed(declared)}")
    if by not in value:
        for name in value:
            if nearest(str(name), [by]) is not None:
                return Fault((*path, name), "", f'{_MEANT} "{by}"? It must be {either(kinds)}')
        return Fault((*path, by), "", f"{_MISSING} {either(kinds)}")
    meant = nearest(str(value[by]), kinds)
    hint = f'did you mean "{meant}"? The kinds are ' if meant is not None else "the kinds are "
    return Fault((*path, by), as_found(value[by]), f"unknown {by}; {hint}{', '.join(kinds)}")


def _bounds(declared: Declared | None, context: Mapping[str, Any]) -> str:
    match declared:
        case Dimensioned(_, si_unit, _, bounds):
            return bound_words(bounds, si_unit)
        case Number(_, bounds):
            return bound_words(bounds)
        case _:
            return str(context.get("range", "in range"))


def _wrong_type(path: Path, declared: Declared | None, value: Any, kind: str) -> str:
    match declared:
        case None:
            return f"cannot be used here ({kind})"
        case Words(words):
            meant = nearest(value, words) if isinstance(value, str) else None
            hint = f'; did you mean "{meant}"?' if meant is not None and len(words) > 1 else ""
            return f"must be {either(words)}{hint}"
        case Text() if isinstance(value, str):
            return f"needs {_text_words(declared)}"
        case Number(True) if isinstance(value, float):
            return "needs a whole number, without decimals"
        case Number() if isinstance(value, str):
            return f"needs {needed(declared)}, without quotes or unit"
        case Number() if isinstance(value, float):
            return "needs a finite number"
        case Several() if isinstance(value, Mapping) and len(path) == 1:
            return f"{_BRACKETS[0]}: write the header as [[{path[0]}]], in double brackets"
        case Keys() | Named() if isinstance(value, list) and len(path) == 1:
            return f"{_BRACKETS[1]}: write the header as [{path[0]}], in single brackets"
        case _:
            return f"needs {needed(declared)}"


def _text_words(declared: Declared | None) -> str:
    if isinstance(declared, Text) and declared.most is not None:
        return f"{declared.least} to {declared.most} characters on one line"
    return "text on one line"
