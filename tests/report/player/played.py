"""Players of small runs, alone in a page."""

from __future__ import annotations

from pathlib import Path

from driftwell.record.reader import Run
from driftwell.report.player.player import player
from driftwell.scenario.read import LoadedScenario, read_scenario

NASTY = "</script><img src=x onerror=alert(1)>&\u2028'\""

AROUND = """title = "Surfaces of every kind"
duration = "1 us"
[species.calcium]
mass = "40 u"
charge = "1 e"
[[cloud]]
name = "load"
species = "calcium"
count = 3
shape = { kind = "gaussian", sigma = "10 um" }
[[wall]]
name = "bore"
kind = "cylinder"
radius = "3 mm"
[[wall]]
name = "plate"
kind = "plane"
at = ["0 mm", "0 mm", "8 mm"]
hole = { radius = "1 mm" }
[[wall]]
name = "blades"
kind = "plane"
at = ["0 mm", "0 mm", "9 mm"]
slit = { width = "1 mm" }
[[wall]]
name = "chest"
kind = "box"
size = ["20 mm", "20 mm", "40 mm"]
[[wall]]
name = "bell"
kind = "sphere"
radius = "30 mm"
[[detector]]
name = "exit"
kind = "plane"
at = ["0 mm", "0 mm", "10 mm"]
radius = "2 mm"
[[detector]]
name = "far"
kind = "plane"
at = ["0 mm", "0 mm", "12 mm"]
"""


def scenario_in(folder: Path, text: str = AROUND) -> LoadedScenario:
    """A scenario read from a file made of this text."""
    folder.mkdir(parents=True, exist_ok=True)
    path = folder / "around.toml"
    path.write_text(text, "utf-8")
    return read_scenario(path)


def page_of(run: Run, folder: Path, scenario: LoadedScenario | None = None) -> Path:
    """A page that holds the player and nothing else, as a report would hold it."""
    parts = player(run, scenario)
    assert parts is not None
    path = folder / "player.html"
    path.write_text(
        '<!doctype html><html lang="en"><head><meta charset="utf-8"><title>player</title>'
        f'<link rel="icon" href="data:,"><style>{parts.style}</style></head>'
        f"<body>{parts.markup}<script>{parts.script}</script></body></html>",
        "utf-8",
    )
    return path
