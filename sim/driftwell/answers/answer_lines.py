"""Answers as a person reads them: value and error to the digits the error warrants, unit, note."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

from driftwell.answers.answer import STANDING, Answer
from driftwell.forms import spelled
from driftwell.forms.paragraph import paragraph

PLAIN_UNITS = ("", "1", "1/m^3", "m^2/(V s)")
"""Units that take no prefix: a pure number has none, in a power it would be raised as well."""
_LONGEST_NAME = 28
_DIGITS = 6
"""Digits of a value whose error is not known."""
_MOST_DIGITS = 10
"""Digits of a value whose error is tiny: how many more could be right, nobody needs."""
_LEAST_EXPONENT = -300
"""Powers of ten below this are too small to divide by."""


@dataclass(frozen=True, slots=True)
class Reading:
    """A value, its error ("" where it is exact) and their unit, as texts."""

    value: str
    error: str
    unit: str


def reading(answer: Answer) -> Reading:
    """The numbers of an answer in words; a value that is none says so."""
    value, error = answer.value, answer.error
    if not math.isfinite(value):
        return Reading("none", "", "")
    known = error is not None and math.isfinite(error) and error > 0.0
    size = max(abs(value), error) if error is not None and known else abs(value)
    factor, power, unit = _scale(size, answer.unit)
    if error is None or not known:
        shown = f"{value / factor:.{_DIGITS}g}{power}"
        return Reading(shown, "" if error == 0.0 else "unknown", unit)
    scaled = float(f"{error / factor:.1e}")
    wanted = 1 - math.floor(math.log10(scaled)) if scaled > 0.0 else _MOST_DIGITS
    whole = max(0, math.floor(math.log10(size / factor))) if size > 0.0 else 0
    place = min(wanted, _MOST_DIGITS - 1 - whole)
    digits = max(place, 0)
    rounded = f"{round(value / factor, place) + 0.0:.{digits}f}"  # -0 is 0
    doubt = f"{scaled:.{digits}f}" if place == wanted else f"{scaled:.2g}"
    if power:
        return Reading(f"({rounded}", f"{doubt}){power}", unit)
    return Reading(rounded, doubt, unit)


def _scale(size: float, unit: str) -> tuple[float, str, str]:
    """What to divide by, the power of ten to write behind the number, and the unit with prefix."""
    exponent = math.floor(math.log10(float(f"{size:.2e}"))) if size > 0.0 else 0
    if unit in PLAIN_UNITS:
        unit = "" if unit == "1" else unit
        plain = -4 <= exponent < 6 or exponent < _LEAST_EXPONENT
        return (1.0, "", unit) if plain else (10.0**exponent, f"e{exponent}", unit)
    if size == 0.0 or exponent < _LEAST_EXPONENT:
        return 1.0, "", unit
    power = 3 * (exponent // 3)
    prefixed = spelled(10.0**power, unit)
    if not prefixed.startswith("1 "):  # beyond the prefixes
        return 10.0**exponent, f"e{exponent}", unit
    return 10.0**power, "", prefixed[2:]


def answer_lines(answers: Sequence[Answer], width: int, sign: str = "±") -> list[str]:
    """The answers as aligned lines of at most `width` characters, notes wrapped.

    sign : what stands between value and error
    """
    readings = [reading(answer) for answer in answers]
    names = [_on_one_line(answer.name) for answer in answers]
    name_width = max((len(name) for name in names if len(name) <= _LONGEST_NAME), default=0)
    value_width = max((len(each.value) for each in readings), default=0)
    texts = [
        f"{each.value:>{value_width}}"
        + (f" {sign} {each.error}" if each.error else "")
        + (f" {each.unit}" if each.unit else "")
        for each in readings
    ]
    text_width = max((len(text) for text in texts), default=0)
    lines = []
    for answer, name, text in zip(answers, names, texts, strict=True):
        beside = name if len(name) <= name_width else ""
        if not beside:
            lines.append(name)
        start = f"{beside:<{name_width}}  {text:<{text_width}}"
        lines += _with_note(start, answer.note, width)
    return lines


def common_lines(answers: Sequence[Answer], width: int) -> list[str]:
    """What is to be known of several answers: of charges that stand for more, and of forces."""
    lines = []
    if any(STANDING in answer.note for answer in answers):
        text = (
            "where each charge stands for more than one, the error is that of the simulated "
            "number, not of the real one"
        )
        lines += paragraph(text, width, "", "  ")
    return lines + _force_lines(answers, width)


def _force_lines(answers: Sequence[Answer], width: int) -> list[str]:
    """What the answers say of the forces behind them; nothing where these have no error."""
    coulomb = [answer.coulomb_error for answer in answers if answer.coulomb_error != 0.0]
    field = [answer.field_error for answer in answers if answer.field_error != 0.0]
    lines = []
    for name, errors, what in (
        ("coulomb error", coulomb, "of the force, as measured on the way"),
        ("field error", field, "of the electrodes' field, as measured when it was mapped"),
    ):
        if not errors:
            continue
        least, most = f"{min(errors):.1e}", f"{max(errors):.1e}"
        size = most if least == most else f"{least} to {most}"
        whose = "" if len(errors) == len(answers) else f", behind {len(errors)} of {len(answers)}"
        text = f"{name}: rms {size} {what}{whose}; it is not in the errors above"
        lines += paragraph(text, width, "", "  ")
    return lines


def _with_note(start: str, note: str, width: int) -> list[str]:
    """A line and its note beside it, or below where it would be too narrow beside it."""
    note = _on_one_line(note)
    if not note:
        return [start.rstrip()]
    beside = len(start) + 2
    if width - beside >= 24:
        first, indent, lines = f"{start}  ", " " * beside, []
    else:
        first = indent = " " * 4
        lines = [start.rstrip()]
    return lines + paragraph(note, max(width, len(indent) + 8), first, indent)


def _on_one_line(text: str) -> str:
    """The text without characters that would break the line or cannot be seen."""
    return "".join(c if c.isprintable() else " " for c in text)
