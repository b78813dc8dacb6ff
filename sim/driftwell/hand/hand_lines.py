"""Hand calculations as a person reads them: formula, range and source, and the values below."""

from __future__ import annotations

from collections.abc import Sequence

from driftwell.answers.answer import Answer
from driftwell.answers.answer_lines import reading
from driftwell.forms.paragraph import paragraph
from driftwell.hand.formula import Formula, HandValue

_LONGEST = 60
"""Characters of a quantity beside which its value is written."""


def number(value: float, unit: str) -> str:
    """A value with its unit, to four digits."""
    shown = reading(Answer("", "", float(f"{value:.4g}"), unit, None, ""))
    return f"{shown.value} {shown.unit}".strip()


def hand_lines(values: Sequence[HandValue], width: int) -> list[str]:
    """All values in lines of at most `width` characters, each below the formula it comes from."""
    groups: dict[Formula, list[HandValue]] = {}
    for value in values:
        groups.setdefault(value.formula, []).append(value)
    lines: list[str] = []
    for formula, own in groups.items():
        lines.append("")
        lines += paragraph(f"{formula.name}: {formula.equation}", width, "", "    ")
        longest = max(len(value.what) for value in own)
        column = min(longest, _LONGEST)
        for value in own:
            place = "within its range" if value.inside else "outside its range"
            start = f"  {value.what:<{column}}  {number(value.value, value.unit):<11}  "
            lines += paragraph(f"{place}: {value.why}", width, start, "      ")
        lines += paragraph(f"holds for {formula.range}", width, "    ", "    ")
        lines += paragraph(f"source: {formula.source}", width, "    ", "    ")
    return lines
