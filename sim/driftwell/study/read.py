"""Reading a study file: all its faults at once, or its cases."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.errors import ScenarioError, StudyError
from driftwell.forms.faults import Fault, read_form
from driftwell.forms.inside import found_inside
from driftwell.scenario.lines import KeyLines
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import Setting, apply_settings
from driftwell.scenario.source import raw_table, shown_path, source_text
from driftwell.scenario.told import shortened, told, with_value
from driftwell.study.form import StudyForm
from driftwell.study.limit_asked import Asked, as_vary, asked_limit
from driftwell.study.points import Axis, Case, expand
from driftwell.study.trial import Scene, trial_faults

A_STUDY = "a study needs a title, the file of a scenario and a [[vary]] or a [limit]"


@dataclass(frozen=True, slots=True)
class Study:
    """A study without faults.

    text : the file, as it is
    scenario_path : the scenario that ``read_scenario(scenario_path, case.settings)`` reads
    scenario_text : that file, as it is
    settings : ``key=value`` that hold in all cases
    axes : in the order of the file
    cases : by number; the replicas of a point stand next to each other
    limit : what is searched for; its cases are then those that the search begins with
    """

    title: str
    text: str
    path: Path
    scenario_path: Path
    scenario_text: str
    settings: tuple[str, ...]
    replicas: int
    axes: tuple[Axis, ...]
    cases: tuple[Case, ...]
    limit: Asked | None = None

    @property
    def name(self) -> str:
        """The file's name without its ending."""
        return self.path.stem


def is_study(path: str | Path) -> bool:
    """Whether a file looks like a study rather than a scenario; False where it cannot be read."""
    try:
        data = raw_table(source_text(Path(path), "study"), str(path), A_STUDY)
    except ScenarioError:
        return False
    return "scenario" in data or "vary" in data or "limit" in data


def read_study(path: str | Path, overrides: Sequence[str] = ()) -> Study:
    """Read and check a study file; `overrides` are settings of the scenario for all cases.

    Cases are tried before they are given back: all of them where they are few, else the values of
    each axis, see :mod:`driftwell.study.trial`. What only one of many cases has is told when that
    case's scenario is read.

    Raises
    ------
    StudyError
        The study or its scenario cannot be read or has faults; one line for each.
    """
    path = Path(path)
    shown = shown_path(path)
    try:
        text = source_text(path, "study")
        data = raw_table(text, shown, A_STUDY)
    except ScenarioError as fault:
        raise StudyError(str(fault)) from fault
    form, faults = read_form(StudyForm, data)
    if form is None:
        raise _refused(faults, data, text, shown)
    scenario_path = path.parent / form.scenario
    inside = found_inside(path.parent, form.scenario, "study")
    if isinstance(inside, str):
        raise _refused([Fault(("scenario",), "", inside)], data, text, shown)
    try:
        scenario_text = source_text(scenario_path)
        scenario = raw_table(scenario_text, shown_path(scenario_path))
    except ScenarioError as fault:
        raise StudyError(str(fault)) from fault
    settings = (*form.settings, *overrides)
    trial = raw_table(scenario_text, shown_path(scenario_path))
    unusable, faults = _set_all(trial, form.settings, overrides)
    axes, cases, limit, more = expanded(form, trial, settings)
    if unusable or faults or more:
        raise _refused([*faults, *more], data, text, shown, unusable)
    scene = Scene(
        scenario,
        scenario_path.parent,
        scenario_text,
        shown_path(scenario_path),
        shown,
        KeyLines(text).line,
        len(settings),
        len(form.settings),
        form.limit is not None,
    )
    lines = trial_faults(scene, axes, cases)
    if lines:
        raise StudyError("\n".join(shortened(lines, shown)))
    return Study(
        form.title,
        text,
        path,
        scenario_path,
        scenario_text,
        settings,
        form.replicas,
        axes,
        cases,
        limit,
    )


def expanded(
    form: StudyForm, data: Mapping[str, Any], settings: Sequence[str]
) -> tuple[tuple[Axis, ...], tuple[Case, ...], Asked | None, list[Fault]]:
    """Axes, cases, what is searched for, and faults with paths in the study's raw table."""
    if form.limit is None:
        axes, cases, faults = expand(form, data, settings)
        return axes, cases, None, faults
    asked, faults = asked_limit(form.limit, data)
    if asked is None:
        return (), (), None, faults
    places = asked.first_places()
    varied = as_vary(form.limit, asked.log).model_copy(update={"points": len(places)})
    axes, cases, faults = expand(form.model_copy(update={"vary": (varied,)}), data, settings)
    moved = [Fault(("limit", *fault.path[2:]), fault.found, fault.needed) for fault in faults]
    return axes, cases, asked, moved


def _set_all(
    data: dict[str, Any], own: Sequence[str], overrides: Sequence[str]
) -> tuple[list[str], list[Fault]]:
    """Put settings into the scenario's raw table; lines and faults of those that cannot be."""
    faults = [
        Fault(("set", k), "", why.removeprefix(f"{Setting(text, ()).shown()}: "))
        for k, text in enumerate(own)
        for why in apply_settings(data, [text], Scenario)[1]
    ]
    return apply_settings(data, overrides, Scenario)[1], faults


def _refused(
    faults: Sequence[Fault],
    data: Mapping[str, Any],
    text: str,
    shown: str,
    before: Sequence[str] = (),
) -> StudyError:
    with_values = [with_value(fault, data) for fault in dict.fromkeys(faults)]
    lines = told(with_values, data, StudyForm, text, shown)
    return StudyError("\n".join([*before, *lines]))
