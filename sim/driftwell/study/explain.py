"""A study in words: what varies, over what, and how many runs that makes."""

from __future__ import annotations

from driftwell.forms.paragraph import paragraph
from driftwell.study.limit_asked import Asked
from driftwell.study.limit_words import asked_in_words
from driftwell.study.points import Axis
from driftwell.study.read import Study
from driftwell.study.summary import value_in_words

_MOST = 8
"""Values of an axis that are told."""
_COLUMN = 10


def explain_study(study: Study, width: int) -> list[str]:
    """Lines of at most `width` characters."""
    rows = [("scenario", str(study.scenario_path))]
    if study.settings:
        rows.append(("set", ", ".join(study.settings)))
    rows += [("varies" if k == 0 else "", _axis(axis)) for k, axis in enumerate(study.axes)]
    if study.limit is not None:
        rows[-len(study.axes) :] = _limit(study.limit)
        return _laid_out(study, rows, width)
    together = _together(study)
    if together:
        rows.append(("together", together))
    points = len(study.cases) // study.replicas
    runs = f"{len(study.cases)} case{'s' * (len(study.cases) != 1)}"
    if study.replicas > 1:
        runs += f": {points} points, each with {study.replicas} seeds"
    rows.append(("runs", runs))
    return _laid_out(study, rows, width)


def _limit(asked: Asked) -> list[tuple[str, str]]:
    """What is searched for, and how."""
    form = asked.form
    scale = "equal ratios" if asked.log else "equal differences"
    return [
        ("limit", asked_in_words(asked)),
        ("begins", f"with {len(asked.first_places())} values at {scale}"),
        (
            "runs",
            f"at most {form.most_runs}, {form.at_once} at a time; `driftwell limit` finds it",
        ),
    ]


def _laid_out(study: Study, rows: list[tuple[str, str]], width: int) -> list[str]:
    lines = [study.title]
    for name, words in rows:
        lines += paragraph(words, width, name.ljust(_COLUMN), " " * _COLUMN)
    return lines


def _axis(axis: Axis) -> str:
    """The key and its values."""
    values = [value_in_words(value, axis.unit) for value in axis.values]
    if len(values) > _MOST:
        values = [*values[: _MOST - 2], "...", values[-1]]
    kind = " (equal ratios)" if axis.log else ""
    return f"{axis.name}: {len(axis.values)} values{kind}, {', '.join(values)}"


def _together(study: Study) -> str:
    """Which axes advance together, in words; empty where each goes by itself."""
    groups: dict[int, list[str]] = {}
    for axis in study.axes:
        groups.setdefault(axis.group, []).append(axis.name)
    joined = [" with ".join(names) for names in groups.values() if len(names) > 1]
    return "; ".join(joined)
