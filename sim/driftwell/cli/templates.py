"""The starting scenarios that are shipped: TOML files, told by the first line of their comment."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from importlib.resources import files

ENDING = ".toml"


@dataclass(frozen=True, slots=True)
class Template:
    """A starting scenario or study.

    kind : its name, that of its file
    text : the file's whole text
    line : one line that says what it is for
    scenario : of a study, the name of the scenario file it varies; None of a scenario
    """

    kind: str
    text: str
    line: str
    scenario: str | None


def templates() -> dict[str, Template]:
    """All of them by kind: scenarios first, then studies, each in the order of the alphabet."""
    folder = files("driftwell").joinpath("templates")
    found = [
        _template(each.name.removesuffix(ENDING), each.read_text(encoding="utf-8"))
        for each in folder.iterdir()
        if each.name.endswith(ENDING)
    ]
    found.sort(key=lambda each: (each.scenario is not None, each.kind))
    return {each.kind: each for each in found}


def _template(kind: str, text: str) -> Template:
    line = text.partition("\n")[0].removeprefix("#").strip()
    return Template(kind, text, line, tomllib.loads(text).get("scenario"))
