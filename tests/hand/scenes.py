"""Scenes for hand calculations: small scenarios put together and not run. Settings invented."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from driftwell.counted import counted
from driftwell.hand.formula import HandValue
from driftwell.hand.scene import Scene, scene_of
from driftwell.hand.table import hand_values
from driftwell.scenario.read import read_scenario
from tests.running import quantity
from tests.scenario.good_scenarios import toml_file

E = 1.602176634e-19
U = 1.66053906892e-27


def scene(folder: Path, **sections: Any) -> Scene:
    """The scene of a scenario given by its sections."""
    number = len(list(folder.glob("*.toml")))
    path = folder / f"scene{number}.toml"
    path.write_text(toml_file({"title": "a check", "duration": "1 us", **sections}))
    return scene_of(counted(read_scenario(path))[1])


def one(found: Scene, what: str) -> HandValue:
    """The only value whose quantity begins so."""
    values = [value for value in hand_values(found) if value.what.startswith(what)]
    assert 1 == len(values), [value.what for value in hand_values(found)]
    return values[0]


def ions(mass: float, charge: str = "1 e") -> dict[str, Any]:
    """A species of a mass in kg."""
    return {"ion": {"mass": quantity(mass, "kg"), "charge": charge}}


def cloud(shape: dict[str, Any], species: str = "ion", **more: Any) -> dict[str, Any]:
    """A cloud; 1000 charges unless said otherwise."""
    return {"name": "load", "species": species, "count": 1000, "shape": shape, **more}
