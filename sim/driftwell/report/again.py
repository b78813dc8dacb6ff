"""The scenario of a run, read again from its record: with the files it names, if these are there.

A record holds the scenario's text and settings, not the files it names. These are looked for where
the run's command was given from, and in the run's folder; they are taken only where the digest of
all content is the one that the run noted.
"""

from __future__ import annotations

import shlex
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from driftwell.errors import DriftwellError
from driftwell.forms.faults import read_form
from driftwell.record.header import Header
from driftwell.record.reader import Run
from driftwell.scenario.digest import digest, files_named
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario, checked_table
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table

SHOWN = "scenario.toml"
"""Name of the scenario in a run's folder."""


@dataclass(frozen=True, slots=True)
class Again:
    """What could be read again.

    loaded : the scenario and the files it names; None where not all of it is there
    scenario : what its text alone says; None where this version cannot read it
    why : why `loaded` is None, in a sentence without its full stop; else empty
    """

    loaded: LoadedScenario | None
    scenario: Scenario | None
    why: str


def scenario_of(run: Run) -> LoadedScenario | None:
    """The scenario of a run, whole; None where it cannot be read, or a file it names is missing."""
    return read_again(run).loaded


def read_again(run: Run) -> Again:
    """As much of a run's scenario as there is."""
    header = run.header
    try:
        data = raw_table(header.scenario, SHOWN)
        _, unusable = apply_settings(data, header.settings, Scenario)
        scenario, faults = read_form(Scenario, data)
    except DriftwellError as fault:
        return Again(None, None, f"the scenario in the record cannot be read ({fault})")
    if unusable or faults or scenario is None:
        return Again(None, None, _UNREADABLE)
    named = files_named(scenario)
    for folder in _folders(run) if named else (run.folder,):
        try:
            whole, faults = checked_table(data, folder)
            found = "" if whole is None else digest(whole, folder)
        except (DriftwellError, OSError):
            continue
        if whole is None or (named and found != header.digest):
            continue
        loaded = LoadedScenario(
            whole, header.scenario, Path(SHOWN), folder, header.digest or found, header.settings
        )
        return Again(loaded, whole, "")
    if not named:
        return Again(None, scenario, _UNREADABLE)
    listed = ", ".join(f'"{name}"' for name in dict.fromkeys(named))
    return Again(
        None,
        scenario,
        f"the scenario names {listed}, and no such file is there any more that is as it was when "
        "the run was made",
    )


_UNREADABLE = "this version of driftwell has faults to find in the scenario of the record"


def _folders(run: Run) -> Iterator[Path]:
    """Where files named in the scenario may lie."""
    path = _scenario_path(run.header)
    if path is not None:
        yield path.parent
        if not path.is_absolute():
            yield run.folder.absolute().parent / path.parent
    yield run.folder
    yield run.folder.absolute().parent


def _scenario_path(header: Header) -> Path | None:
    """The file that the run's command names."""
    try:
        words = shlex.split(header.command)
    except ValueError:
        return None
    if words[:2] != ["driftwell", "run"] or len(words) < 3 or "\0" in words[2]:
        return None
    return Path(words[2])
