"""The digest of a scenario: the same for the same content, however it is written down."""

from __future__ import annotations

import hashlib
import json
from pathlib import Path
from typing import Any

from driftwell.errors import ScenarioError
from driftwell.scenario.model import Scenario
from driftwell.scenario.source import shown_path

LATER = ("electrodes", "electrode", "images", "source", "process", "cell")
"""Sections left out where they are not used: scenarios from before keep their digests."""
LATER_KEYS: tuple[tuple[str, str, object], ...] = (
    ("coulomb", "frame", "auto"),
    ("coulomb", "share_frame", []),
)
"""Section, key and default of keys left out where they say nothing else, for the same reason."""
LATER_OF_FILES = ("of", "at", "iteration")
"""Keys of files of charges left out where they are not given, for the same reason."""


def digest(scenario: Scenario, folder: Path) -> str:
    """SHA-256, in hexadecimal, of every value in SI units, defaults too, and of the files named.

    Comments, order, units and whether a default is written out make no difference.
    """
    named = files_named(scenario)
    values = scenario.model_dump(mode="json")
    for section in LATER:
        if not values[section]:
            del values[section]
    for section, name, default in LATER_KEYS:
        if values[section][name] == default:
            del values[section][name]
    for part in (*(each["shape"] for each in values["cloud"]), *_emitters(values)):
        for name in LATER_OF_FILES if part["kind"] == "file" else ():
            if part[name] is None:
                del part[name]
    files = {name: file_digest(folder / name) for name in named}
    content = {"scenario": values, "files": files}
    text = json.dumps(content, sort_keys=True, separators=(",", ":"), allow_nan=False)
    return hashlib.sha256(text.encode()).hexdigest()


def _emitters(values: dict[str, Any]) -> list[dict[str, Any]]:
    return [each["emitter"] for each in values.get("source", ())]


def files_named(scenario: Scenario) -> list[str]:
    """All files that a scenario names, as it names them."""
    named = [name for cloud in scenario.cloud for name in cloud.files_named()]
    named += [name for source in scenario.source for name in source.files_named()]
    named += [name for field in scenario.field for name in field.files_named()]
    named += [
        name for each in scenario.electrode for shape in each.shape for name in shape.files_named()
    ]
    return named


def file_digest(path: Path) -> str:
    """SHA-256, in hexadecimal, of a file; raises ScenarioError where it cannot be read."""
    try:
        with path.open("rb") as stream:
            return hashlib.file_digest(stream, "sha256").hexdigest()
    except OSError as fault:
        raise ScenarioError(f"{shown_path(path)}: cannot be read ({fault.strerror})") from fault
