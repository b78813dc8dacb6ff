"""A small scenario and studies over it, as files."""

from __future__ import annotations

from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.study.read import Study, read_study

SCENARIO = """\
title    = "A few ions between rods"
duration = "20 us"
seed     = 7

[species.barium]
mass   = "137.905 u"
charge = "1 e"

[[cloud]]
name    = "load"
species = "barium"
count   = 20
shape   = { kind = "gaussian", sigma = ["60 um", "60 um", "250 um"] }
motion  = { temperature = "300 K" }

[[field]]
name    = "rods"
kind    = "rf-quadrupole"
radius  = "3.5 mm"
voltage = { amplitude = "180 V", frequency = "1.1 MHz" }

[coulomb]
method = "direct"

[[question]]
name = "size"
ask  = "rms-size"
of   = "load"
axis = "x"
at   = "10 us"
"""

HEAD = 'title = "How wide"\nscenario = "rods.toml"\n'


def study_file(folder: Path, text: str) -> Path:
    """The study `text` with :data:`HEAD` before it, and the scenario, in a folder."""
    (folder / "rods.toml").write_text(SCENARIO, encoding="utf-8")
    path = folder / "wide.toml"
    path.write_text(HEAD + text, encoding="utf-8")
    return path


def study(folder: Path, text: str, *overrides: str) -> Study:
    return read_study(study_file(folder, text), overrides)


def vary(key: str, rest: str) -> str:
    """A ``[[vary]]`` entry on two lines and more."""
    return f"[[vary]]\nkey = {key!r}\n{rest}\n"


def answer(value: float, error: float | None = 0.5, name: str = "size", unit: str = "m") -> Answer:
    return Answer(name, "rms-size", value, unit, error, "of 20 charges", 1e-5)
