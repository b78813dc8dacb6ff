"""Reading a scenario file: all its faults at once, or the scenario."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.errors import ScenarioError
from driftwell.forms.faults import Fault, read_form
from driftwell.forms.wording import as_found
from driftwell.scenario.cross_checks import cross_faults
from driftwell.scenario.digest import digest
from driftwell.scenario.lines import KeyLines
from driftwell.scenario.model import Scenario
from driftwell.scenario.places import ended, place
from driftwell.scenario.references import reference_faults
from driftwell.scenario.settings import Setting, apply_settings, is_within, touches
from driftwell.scenario.source import raw_table, shown_path, source_text

MOST_TOLD = 200


@dataclass(frozen=True, slots=True)
class LoadedScenario:
    """A scenario without faults, and where it came from.

    text : the file, as it is
    settings : ``key=value`` given beside it, which are in `scenario` and not in `text`
    folder : what files named in the scenario count from
    digest : of the content with settings and files named, see :mod:`driftwell.scenario.digest`
    """

    scenario: Scenario
    text: str
    path: Path
    folder: Path
    digest: str
    settings: tuple[str, ...] = ()


def read_scenario(path: str | Path, overrides: Sequence[str] = ()) -> LoadedScenario:
    """Read and check a scenario file, with `overrides` such as ``"duration=1 ms"`` put in.

    Raises
    ------
    ScenarioError
        The file cannot be read or has faults; the text has one line for each, in file order.
    """
    path = Path(path)
    shown = shown_path(path)
    text = source_text(path)
    data = raw_table(text, shown)
    settings, unusable = apply_settings(data, overrides, Scenario)
    scenario, faults = checked_table(data, path.parent)
    if faults or unusable or scenario is None:
        raise ScenarioError("\n".join(unusable + _told(faults, data, settings, text, shown)))
    folder = path.parent
    return LoadedScenario(scenario, text, path, folder, digest(scenario, folder), tuple(overrides))


def checked_table(data: Mapping[str, Any], folder: Path) -> tuple[Scenario | None, list[Fault]]:
    """The scenario of a raw table, or all faults of its keys, its names and its values together."""
    scenario, faults = read_form(Scenario, data)
    faults += reference_faults(data)
    if scenario is None or faults:
        return None, list(dict.fromkeys(faults))
    found = [_with_value(fault, data) for fault in cross_faults(scenario, folder)]
    return (None, found) if found else (scenario, [])


def _with_value(fault: Fault, data: Mapping[str, Any]) -> Fault:
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


def _told(
    faults: Iterable[Fault],
    data: Mapping[str, Any],
    settings: Sequence[Setting],
    text: str,
    shown: str,
) -> list[str]:
    """One line for each fault: those of settings first, then in the order of the file."""
    lines = KeyLines(text)
    told: list[tuple[int, str]] = []
    for fault in faults:
        where = place(fault.path, data, Scenario)
        sentence = ended(
            f"{where} = {fault.found}: {fault.needed}"
            if fault.found
            else f"{where}: {fault.needed}"
        )
        own = next(
            (setting for setting in reversed(settings) if is_within(fault.path, setting)), None
        )
        if own is not None:
            told.append((0, f"{own.shown()}: {sentence}"))
            continue
        near = next((setting for setting in settings if touches(fault.path, setting)), None)
        if near is not None and fault.path:
            sentence = f"{sentence} (with {near.shown()})"
        line = lines.line(fault.path)
        told.append((line, f"{shown}:{line} {sentence}"))
    told.sort(key=lambda pair: pair[0])
    sentences = [sentence for _, sentence in told]
    more = len(sentences) - MOST_TOLD
    return sentences if more <= 0 else [*sentences[:MOST_TOLD], f"{shown}: {more} more faults."]
