"""Faults of a file in lines: where each stands, what was found, what is needed."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from typing import Any

from driftwell.forms import Form
from driftwell.forms.faults import Fault
from driftwell.forms.wording import as_found
from driftwell.scenario.lines import KeyLines
from driftwell.scenario.places import ended, place
from driftwell.scenario.settings import Setting, is_within, touches

MOST_TOLD = 200


def told(
    faults: Iterable[Fault],
    data: Mapping[str, Any],
    form: type[Form],
    text: str,
    shown: str,
    settings: Sequence[Setting] = (),
) -> list[str]:
    """One line for each fault: those of settings first, then in the order of the file.

    data, form : the raw table of the file, and what it is declared as
    text, shown : the file's text, and its path as messages show it
    """
    lines = KeyLines(text)
    found: list[tuple[int, str]] = []
    for fault in faults:
        words = sentence(fault, data, form)
        own = next(
            (setting for setting in reversed(settings) if is_within(fault.path, setting)), None
        )
        if own is not None:
            found.append((0, f"{own.shown()}: {words}"))
            continue
        near = next((setting for setting in settings if touches(fault.path, setting)), None)
        if near is not None and fault.path:
            words = f"{words} (with {near.shown()})"
        line = lines.line(fault.path)
        found.append((line, f"{shown}:{line} {words}"))
    found.sort(key=lambda pair: pair[0])
    return shortened([words for _, words in found], shown)


def sentence(fault: Fault, data: Mapping[str, Any], form: type[Form]) -> str:
    """The fault in words: section and key, what was found there, what is needed."""
    where = place(fault.path, data, form)
    found = f" = {fault.found}" if fault.found else ""
    return ended(f"{where}{found}: {fault.needed}")


def with_value(fault: Fault, data: Mapping[str, Any]) -> Fault:
    """The fault, with the value that stands at its key where that is a single one."""
    value: Any = data
    for part in fault.path:
        try:
            value = value[part]
        except (LookupError, TypeError):
            return fault
    if fault.found or isinstance(value, dict | list):
        return fault
    return Fault(fault.path, as_found(value), fault.needed)


def shortened(sentences: list[str], shown: str) -> list[str]:
    """As many sentences as anyone reads, and how many more there are."""
    more = len(sentences) - MOST_TOLD
    return sentences if more <= 0 else [*sentences[:MOST_TOLD], f"{shown}: {more} more faults."]
