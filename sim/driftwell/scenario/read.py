"""Reading a scenario file: all its faults at once, or the scenario."""

from __future__ import annotations

import shlex
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from driftwell.errors import ScenarioError
from driftwell.forms.faults import Fault, read_form
from driftwell.forms.noise import with_noise_drawn
from driftwell.scenario.cross_checks import cross_faults
from driftwell.scenario.digest import digest
from driftwell.scenario.model import Scenario
from driftwell.scenario.references import reference_faults
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table, shown_path, source_text
from driftwell.scenario.told import told, with_value


@dataclass(frozen=True, slots=True)
class LoadedScenario:
    """A scenario without faults, and where it came from.

    text : the file, as it is
    settings : ``key=value`` given beside it, which are in `scenario` and not in `text`
    folder : what files named in the scenario count from
    digest : of the content with settings and files named, see :mod:`driftwell.scenario.digest`
    from_code : whether a program made it, and no file holds what a command would read
    """

    scenario: Scenario
    text: str
    path: Path
    folder: Path
    digest: str
    settings: tuple[str, ...] = ()
    from_code: bool = False

    @property
    def command(self) -> str:
        """The command that makes a run of it; empty where none does."""
        if self.from_code:
            return ""
        settings = [word for each in self.settings for word in ("--set", each)]
        text = shlex.join(["driftwell", "run", str(self.path), *settings])
        return text.encode(errors="backslashreplace").decode()  # names of files may be no text


def read_scenario(path: str | Path, overrides: Sequence[str] = ()) -> LoadedScenario:
    """Read and check a scenario file, with `overrides` such as ``"duration=1 ms"`` put in.

    Raises
    ------
    ScenarioError
        The file cannot be read or has faults; the text has one line for each, in file order.
    """
    path = Path(path)
    return scenario_of(source_text(path), path, overrides)


def scenario_of(text: str, path: Path, overrides: Sequence[str] = ()) -> LoadedScenario:
    """The scenario of a text that was read from `path`; as :func:`read_scenario`."""
    shown, folder = shown_path(path), path.parent
    data = raw_table(text, shown)
    settings, unusable = apply_settings(data, overrides, Scenario)
    scenario, faults = checked_table(data, folder)
    if faults or unusable or scenario is None:
        lines = told(faults, data, Scenario, text, shown, settings)
        raise ScenarioError("\n".join(unusable + lines))
    return LoadedScenario(scenario, text, path, folder, digest(scenario, folder), tuple(overrides))


def checked_table(data: Mapping[str, Any], folder: Path) -> tuple[Scenario | None, list[Fault]]:
    """The scenario of a raw table, or all faults of its keys, its names and its values together."""
    scenario, faults = read_form(Scenario, data)
    faults += reference_faults(data)
    if scenario is None or faults:
        return None, list(dict.fromkeys(faults))
    seed = scenario.seed
    fields = tuple(
        with_noise_drawn(field.found_in(folder), seed, field.name) for field in scenario.field
    )
    electrodes = tuple(with_noise_drawn(each, seed, each.name) for each in scenario.electrode)
    scenario = scenario.model_copy(update={"field": fields, "electrode": electrodes})
    found = [with_value(fault, data) for fault in cross_faults(scenario, folder)]
    return (None, found) if found else (scenario, [])
