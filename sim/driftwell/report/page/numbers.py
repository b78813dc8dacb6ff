"""Numbers as a page writes them: with a unit that has its prefix, the error beside the value."""

from __future__ import annotations

import math

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import PLAIN_UNITS, reading
from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.report.paper.ruler import in_words


def amount(value: float, unit: str, digits: int = 4) -> str:
    """A value with its unit, to so many digits."""
    if not math.isfinite(value):
        return "none"
    if unit in PLAIN_UNITS:
        shown = f"{value:.{digits}g}".replace("-", "−")
        return shown if unit in {"", "1"} else f"{shown} {unit}"
    return in_words(value, unit, digits)


def answered(answer: Answer) -> str:
    """Value, error and unit of an answer; without an error where none is known or there is none."""
    shown = reading(answer)
    error = f" ± {shown.error}" if shown.error and shown.error != "unknown" else ""
    unit = shown.unit
    if unit == f"u{answer.unit}":
        unit = f"µ{answer.unit}"
    return f"{shown.value}{error} {unit}".strip().replace("-", "−")


def count_of(number: float, what: str, several: str = "") -> str:
    """So many of something: ``1 run``, ``12 runs``."""
    return f"{number:.7g} {what if number == 1 else several or f'{what}s'}"


def electronvolts(energy: float) -> str:
    """An energy, J, in electronvolts."""
    return in_words(energy / ELEMENTARY_CHARGE, "eV", 4)


def residual(value: float) -> str:
    """A relative residual: its size, to two digits."""
    if not math.isfinite(value):
        return "not a number"
    return "0" if value == 0.0 else f"{abs(value):.1e}".replace("e-0", "e−").replace("e-", "e−")
