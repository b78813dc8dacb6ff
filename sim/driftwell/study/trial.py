"""Cases tried before any runs: their settings are put into the scenario, and its faults are told.

To read a scenario takes 0.3 to 1.2 ms when its text has been parsed once, and more where charges
must be placed. So all cases are tried where they are few; where they are many, the values of each
axis are, one after another: of a range or of a long list of numbers its least and its greatest.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from copy import deepcopy
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.scenario.lines import KeyLines
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import checked_table
from driftwell.scenario.settings import Setting, apply_settings, is_within
from driftwell.scenario.told import sentence
from driftwell.study.points import Axis, Case

ALL_UP_TO = 300
"""Most cases of which every one is tried; and most texts of one axis."""


@dataclass(frozen=True, slots=True)
class Scene:
    """What cases are tried with: the scenario's raw table and text, and where the study says what.

    shown_scenario, shown_study : paths as messages show them
    line : the line of a path in the study
    common : number of settings that hold in all cases; the first `own` of them stand in the study
    limited : whether a [limit] varies, not a [[vary]]
    """

    data: Mapping[str, Any]
    folder: Path
    text: str
    shown_scenario: str
    shown_study: str
    line: Callable[[tuple[str | int, ...]], int]
    common: int
    own: int
    limited: bool = False


@dataclass(frozen=True, slots=True)
class _Found:
    """One fault of one case.

    key : the same for the same fault in other cases
    where : where the study, or the command line, says the setting behind it; empty: no one setting
    setting : that setting
    words : the fault as the scenario tells it
    """

    key: object
    where: str
    setting: str
    words: str


def trial_faults(scene: Scene, axes: Sequence[Axis], cases: Sequence[Case]) -> list[str]:
    """One line for each fault of the cases tried, as the first case that has it tells it."""
    tried = chosen(axes, cases)
    met: dict[object, list[tuple[Case, _Found]]] = {}
    for case in tried:
        for found in _faults(scene, axes, case):
            met.setdefault(found.key, []).append((case, found))
    faulty = {case.number for those in met.values() for case, _ in those}
    well = [case for case in tried if case.number not in faulty]
    return [_line(scene, axes, len(tried), well, those) for those in met.values()]


def _line(
    scene: Scene,
    axes: Sequence[Axis],
    tried: int,
    well: Sequence[Case],
    those: Sequence[tuple[Case, _Found]],
) -> str:
    """A fault in words; where no one setting is behind it, the case and what it varies too."""
    case, found = those[0]
    if found.where:
        more = len({other.setting for _, other in those}) - 1
        also = f" ({more} more of its values {'has' if more == 1 else 'have'} this fault)"
        return f"{found.where}: {found.words}{also if more else ''}"
    if len(those) == tried:
        return found.words
    behind = next(
        (k for k in range(len(axes)) if all(c.values[k] != case.values[k] for c in well)), 0
    )
    varied = " ".join(Setting(text, ()).shown() for text in case.settings[scene.common :])
    where = _where(scene, axes, scene.common + behind)
    return f"{where}, case {case.number}, {varied}: {found.words}"


def chosen(axes: Sequence[Axis], cases: Sequence[Case]) -> list[Case]:
    """The cases to try."""
    if len(cases) <= ALL_UP_TO:
        return list(cases)
    wanted = [_telling_values(axis) for axis in axes]
    numbers = {1}
    for case in cases:
        for values, value in zip(wanted, case.values, strict=True):
            if value in values:
                values.discard(value)
                numbers.add(case.number)
    return [cases[number - 1] for number in sorted(numbers)]


def _telling_values(axis: Axis) -> set[float | str]:
    """The values of an axis that show whether the others can be used."""
    numbers = [value for value in axis.values if isinstance(value, float)]
    if not numbers:
        return set(axis.values[:ALL_UP_TO])
    if axis.listed and len(numbers) <= ALL_UP_TO:
        return set(numbers)
    return {min(numbers), max(numbers)}


def _faults(scene: Scene, axes: Sequence[Axis], case: Case) -> Iterator[_Found]:
    data = deepcopy(dict(scene.data))
    settings: list[Setting] = []
    for k, text in enumerate(case.settings):
        made, unusable = apply_settings(data, [text], Scenario)
        settings += made
        for words in unusable:
            where = _where(scene, axes, k)
            yield _Found((where, words.partition(": ")[2]), where, text, words)
    if len(settings) < len(case.settings):
        return
    _, faults = checked_table(data, scene.folder)
    for fault in faults:
        words = sentence(fault, data, Scenario)
        behind = [k for k, setting in enumerate(settings) if is_within(fault.path, setting)]
        if behind:
            own = settings[behind[-1]]
            where = _where(scene, axes, behind[-1])
            key = (where, fault.path, fault.needed)
            yield _Found(key, where, own.text, f"{own.shown()}: {words}")
        else:
            line = KeyLines(scene.text).line(fault.path)
            told = f"{scene.shown_scenario}:{line} {words}"
            yield _Found((fault.path, fault.needed), "", "", told)


def _where(scene: Scene, axes: Sequence[Axis], k: int) -> str:
    """Where the study, or the command line, says setting number `k` of a case."""
    if k < scene.own:
        return f"{scene.shown_study}:{scene.line(('set', k))} set entry {k + 1}"
    if k < scene.common:
        return "the command line"
    if k - scene.common >= len(axes):
        return f"{scene.shown_study}:{scene.line(('replicas',))} replicas"
    if scene.limited:
        return f"{scene.shown_study}:{scene.line(('limit',))} [limit]"
    entry = axes[k - scene.common].entry
    return f"{scene.shown_study}:{scene.line(('vary', entry))} [[vary]] number {entry + 1}"
