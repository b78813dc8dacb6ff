"""From tables made in code to scenarios without faults, and faults in words."""

from __future__ import annotations

from collections.abc import Mapping
from copy import deepcopy
from dataclasses import dataclass, replace
from pathlib import Path
from typing import Any

from driftwell.api.raw_values import IN_CODE
from driftwell.errors import ScenarioError
from driftwell.scenario.digest import digest
from driftwell.scenario.lines import KeyLines
from driftwell.scenario.model import Scenario as Declared
from driftwell.scenario.read import LoadedScenario, checked_table
from driftwell.scenario.settings import apply_settings, path_of, setting_text
from driftwell.scenario.told import sentence, shortened


@dataclass(frozen=True, slots=True)
class Source:
    """The file a scenario was read from, and the settings that hold besides."""

    text: str
    path: Path
    settings: tuple[str, ...] = ()

    def with_setting(self, text: str) -> Source:
        """With one more setting."""
        return replace(self, settings=(*self.settings, text))


def loaded_from_code(table: Mapping[str, Any], text: str, folder: Path) -> LoadedScenario:
    """The scenario of a raw table, whose text as a file is `text`.

    Raises ScenarioError with a line for each fault, in the order of the text.
    """
    scenario, faults = checked_table(table, folder)
    if faults or scenario is None:
        lines = KeyLines(text)
        told = sorted(faults, key=lambda fault: lines.line(fault.path))
        sentences = [f"{IN_CODE}: {sentence(fault, table, Declared)}" for fault in told]
        raise ScenarioError("\n".join(shortened(sentences, IN_CODE)))
    path = Path(IN_CODE)
    return LoadedScenario(scenario, text, path, folder, digest(scenario, folder), from_code=True)


def with_setting(table: Mapping[str, Any], key: str, value: Any) -> tuple[str, dict[str, Any]]:
    """The setting ``key=value`` as text, and a copy of the table with it put in.

    Raises ScenarioError where it cannot be.
    """
    changed = deepcopy(dict(table))
    try:
        path_of(key, changed, Declared)
    except LookupError as fault:
        raise ScenarioError(f'{IN_CODE}: set "{key}": {fault}') from fault
    text = setting_text(key, value)
    unusable = apply_settings(changed, [text], Declared)[1]
    if unusable:
        raise ScenarioError(f"{IN_CODE}: {unusable[0]}")
    return text, changed


def settings_in(table: dict[str, Any], settings: tuple[str, ...]) -> dict[str, Any]:
    """The table with settings put in (changed); those that cannot be are told when it is loaded."""
    apply_settings(table, settings, Declared)
    return table
