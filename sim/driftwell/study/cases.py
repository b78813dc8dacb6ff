"""Studies made from a scenario and a list of cases, where no study file says what varies."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from driftwell.forms.wording import toml_text
from driftwell.scenario.source import source_text
from driftwell.study.axis import Value
from driftwell.study.points import Axis, Case
from driftwell.study.read import Study


def study_of(
    scenario_path: str | Path,
    overrides: Sequence[str],
    cases: Sequence[Sequence[str]],
    title: str,
    *,
    axes: Sequence[Axis] = (),
    values: Sequence[Sequence[Value]] = (),
    text: str | None = None,
) -> Study:
    """A study whose cases are listed one by one; none of them is tried here.

    Parameters
    ----------
    overrides
        Settings ``key=value`` that hold in all cases.
    cases
        The settings of each case besides `overrides`, which they may undo; none is the scenario
        as it stands. Cases are numbered in this order, from 1.
    axes, values
        What varies and, for each case, its values; both left out where settings say it all.
    text
        The study file behind the cases; left out, it is made of the list.

    Raises
    ------
    ScenarioError
        The scenario's file cannot be read as text.
    """
    path = Path(scenario_path)
    scenario_text = source_text(path)
    points = values or [()] * len(cases)
    numbered = tuple(
        Case(number, (*overrides, *own), tuple(point), 1)
        for number, (own, point) in enumerate(zip(cases, points, strict=True), 1)
    )
    return Study(
        title,
        _listed(title, path, overrides, cases) if text is None else text,
        path,
        path,
        scenario_text,
        tuple(overrides),
        1,
        tuple(axes),
        numbered,
    )


def _listed(
    title: str, path: Path, overrides: Sequence[str], cases: Sequence[Sequence[str]]
) -> str:
    """The cases as a text to keep beside the runs."""
    lines = [
        f"title = {toml_text(title)}",
        f"scenario = {toml_text(path.name)}",
        f"set = {toml_text(list(overrides))}",
    ]
    for own in cases:
        lines += ["", "[[case]]", f"set = {toml_text(list(own))}"]
    return "\n".join(lines) + "\n"
