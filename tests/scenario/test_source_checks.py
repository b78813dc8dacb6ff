"""Sources in scenarios: what does not fit together is told, each at the key to change."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from driftwell.assembly import assembled
from driftwell.constants import ELECTRIC_CONSTANT, ELECTRON_MASS, ELEMENTARY_CHARGE
from driftwell.errors import ScenarioError
from driftwell.scenario.explain import explain
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.scenario.good_scenarios import toml_file

DISC = {"kind": "disc", "radius": "1 mm"}
GUN: dict[str, Any] = {
    "name": "gun",
    "species": "electron",
    "emitter": DISC,
    "current": "1 mA",
    "count": 200,
    "spacing": "even",
}
LIMITED = GUN | {"space_charge_limited": True}
PLANE = {"kind": "plane", "at": ["0 m", "0 m", "0 m"]}
NOWHERE = {"z": ["5 m", "9 m"]}
BLOCK = {
    "name": "block",
    "voltage": "10 V",
    "shape": [{"kind": "rectangle", "low": ["0 mm", "-2 mm"], "high": ["5 mm", "0 mm"]}],
}


def read(folder: Path, *sources: dict[str, Any], **sections: Any) -> LoadedScenario:
    """A scenario with these sources, and no cloud."""
    whole = {"title": "sources", "duration": "1 us", "source": list(sources), **sections}
    path = folder / "sources.toml"
    path.write_text(toml_file(whole))
    return read_scenario(path)


@pytest.mark.parametrize(
    ("source", "sections", "told"),
    [
        (GUN | {"species": "barium"}, {}, 'species = "barium": no species is called so'),
        (
            GUN | {"emitter": {"kind": "electrode", "electrode": "blok"}},
            {"electrode": [BLOCK]},
            'emitter.electrode = "blok": no [[electrode]] is called so; did you mean "block"?',
        ),
        (LIMITED, {}, "space_charge_limited = true: needs [images]"),
        (
            LIMITED,
            {"images": PLANE, "coulomb": {"method": "off"}},
            "space_charge_limited = true: needs the charges' own field",
        ),
        (
            GUN | {"emitter": DISC | {"centre": ["0 mm", "0 mm", "-1 mm"]}},
            {"electrode": [BLOCK]},
            '200 of 200 charges begin inside the electrode "block"',
        ),
        (GUN, {"stepping": {"extent": "0.5 mm"}}, "farther than [stepping] extent, 500 um"),
        (GUN | {"current": "-1 mA"}, {}, "must never be negative"),
        (
            {"name": "gun", "species": "electron", "emitter": {"kind": "file", "path": "no.csv"}},
            {},
            '[[source]] "gun" emitter.path = "no.csv"',
        ),
        (
            GUN
            | {
                "emitter": {
                    "kind": "electrode",
                    "electrode": "block",
                    "part": {"z": ["5 m", "9 m"]},
                }
            },
            {"electrode": [BLOCK]},
            'no surface of electrode "block" is left to emit',
        ),
    ],
)
def test_what_a_source_cannot_be_is_told(
    tmp_path: Path, source: dict[str, Any], sections: dict[str, Any], told: str
) -> None:
    with pytest.raises(ScenarioError) as fault:
        read(tmp_path, source, **sections)
    assert told in str(fault.value)
    assert '[[source]] "gun"' in str(fault.value)
    assert "sources.toml:" in str(fault.value)


def test_a_name_is_a_cloud_or_a_source(tmp_path: Path) -> None:
    """Questions ask of both by name."""
    shape = {"kind": "ring", "radius": "1 mm"}
    cloud = {"name": "gun", "species": "electron", "count": 2, "shape": shape}
    with pytest.raises(ScenarioError, match=r"is the name of a \[\[cloud\]\] already"):
        read(tmp_path, GUN, cloud=[cloud])


def test_a_scenario_of_neither_clouds_nor_sources_is_refused(tmp_path: Path) -> None:
    with pytest.raises(ScenarioError, match=r"needs at least one group of charges, or a \[\[sour"):
        read(tmp_path)


def test_births_beyond_a_wall_are_refused_before_the_run(tmp_path: Path) -> None:
    ball = {"name": "ball", "kind": "sphere", "radius": "0.5 mm"}
    loaded = read(tmp_path, GUN, wall=[ball])
    with pytest.raises(ScenarioError, match=r'source.. "gun": .* do not begin inside the wall'):
        assembled(loaded)


def test_births_where_the_conductor_is_are_refused_before_the_run(tmp_path: Path) -> None:
    loaded = read(tmp_path, LIMITED, images=PLANE | {"at": ["0 m", "0 m", "1 mm"]})
    with pytest.raises(ScenarioError, match=r"source.. \"gun\": .* charges' side of \[images\]"):
        assembled(loaded)


def test_a_source_is_said_in_words(tmp_path: Path) -> None:
    said = " ".join(" ".join(explain(read(tmp_path, LIMITED, images=PLANE))).split())
    assert (
        "source gun 200 electron charges, each for 3.12075e+07 real ones (-1 nC in all), from a "
        "disc of radius 1 mm, at most 1 mA from 0 s to the end, even, at rest, limited by space "
        "charge" in said
    )


def test_the_step_follows_what_will_be_born(tmp_path: Path) -> None:
    """A disc's stream by how it drives itself apart, the cube root of |q| J/(m eps0 R)."""
    parts = assembled(read(tmp_path, GUN, coulomb={"method": "direct", "softening": "0.1 mm"}))
    density = 1e-3 / (math.pi * 1e-6)
    ratio = ELEMENTARY_CHARGE / ELECTRON_MASS
    rate = (ratio * density / (ELECTRIC_CONSTANT * 1e-3)) ** (1.0 / 3.0)
    expected = 2.0 * math.pi / (100.0 * rate)
    assert expected == pytest.approx(parts.choice.step, rel=1e-9, abs=0.0)
    assert 'the charges of source "gun" among each other' in parts.choice.because
    assert 0 == len(parts.particles)
    assert 200 == len(parts.everyone) == parts.extent.charges
