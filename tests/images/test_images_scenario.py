"""Images stated in a scenario: read, refused, explained, run, recorded."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest

from driftwell.errors import ScenarioError
from driftwell.images.form import followed
from driftwell.record.header import header_of
from driftwell.record.layout import HEADER
from driftwell.record.reader import Run
from driftwell.scenario.explain import explain
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.running import carried_out, points, species, track
from tests.scenario.good_scenarios import toml_file

PLANE = {"kind": "plane", "at": ["0 m", "0 m", "-1 mm"], "normal": [0, 0, 3]}
KINDS: dict[str, dict[str, Any]] = {
    "plane": PLANE,
    "gap": {"kind": "gap", "at": ["0 m", "0 m", "-1 mm"], "distance": "3 mm"},
    "sphere": {"kind": "sphere", "radius": "1 mm", "closest": "1 um"},
    "cylinder": {"kind": "cylinder", "radius": "1 mm", "axis": "x"},
}


def sections(images: dict[str, Any], place: Any = (0.0, 0.0, 0.0)) -> dict[str, Any]:
    """Two macro-charges in a scenario with images."""
    other = np.add(place, (0.0, 1e-4, 1e-4))
    return {
        "species": {"ion": species(1e-25)},
        "cloud": [{**points("load", "ion", [place, other]), "weight": 1000}],
        "coulomb": {"softening": "1 um"},
        "stepping": {"step": "10 ns"},
        "images": images,
    }


def loaded(folder: Path, images: dict[str, Any], place: Any = (0.0, 0.0, 0.0)) -> LoadedScenario:
    """Such a scenario, read."""
    path = folder / "images.toml"
    path.write_text(toml_file({"title": "a check", "duration": "1 us", **sections(images, place)}))
    return read_scenario(path)


@pytest.mark.parametrize(
    ("kind", "words"),
    [
        ("plane", "of a plane at (0, 0, -1) mm, charges towards (0, 0, 1)"),
        ("gap", "of the gap from a plane at (0, 0, -1) mm to another 3 mm away towards (0, 0, 1)"),
        ("sphere", "of a sphere of radius 1 mm around the charges"),
        ("cylinder", "of an endless tube along x, radius 1 mm, whose force does not grow beyond"),
    ],
)
def test_images_are_told_in_words(tmp_path: Path, kind: str, words: str) -> None:
    text = " ".join(" ".join(explain(loaded(tmp_path, KINDS[kind]))).split())
    assert f"images {words}" in text
    assert "Nothing stops charges at the conductor" in text


@pytest.mark.parametrize(
    ("images", "said"),
    [
        ({"kind": "cone"}, "unknown kind; the kinds are plane, gap, sphere, cylinder"),
        ({**PLANE, "normal": [0, 0, 0]}, "must have at least one component other than 0"),
        ({**PLANE, "closest": "-1 um"}, "must be at least 0"),
        ({"kind": "sphere"}, "radius"),
        ({"kind": "cylinder", "radius": "1 mm", "reach": 1.0}, "at most 0.95"),
        ({"kind": "electrodes", "panels": 3}, "at least 50"),
        ({"kind": "electrodes"}, "needs an [[electrode]], which would answer"),
    ],
)
def test_what_cannot_be_is_refused_in_words(
    tmp_path: Path, images: dict[str, Any], said: str
) -> None:
    with pytest.raises(ScenarioError, match="images") as fault:
        loaded(tmp_path, images)
    assert said in str(fault.value)


@pytest.mark.parametrize(
    ("kind", "place"),
    [("plane", (0, 0, -1.2e-3)), ("sphere", (0, 1.1e-3, 0)), ("cylinder", (9e-3, 0, 1.1e-3))],
)
def test_charges_born_beyond_the_conductor_are_refused(
    tmp_path: Path, kind: str, place: Any
) -> None:
    with pytest.raises(ScenarioError, match=r'"load": [12] of 2 charges do not begin on') as fault:
        carried_out(tmp_path, 1e-6, **sections(KINDS[kind], place))
    assert "Move the cloud, or the conductor" in str(fault.value)


@pytest.mark.parametrize("kind", KINDS)
def test_a_run_keeps_what_images_did(tmp_path: Path, kind: str) -> None:
    """Their energy and impulse in the ledger, their conductor in the header; charges fall to it."""
    run = carried_out(tmp_path, 1e-6, **sections(KINDS[kind], (0.0, 1e-4, -5e-4)))
    without = sections(KINDS[kind], (0.0, 1e-4, -5e-4))
    del without["images"]
    off = carried_out(tmp_path, 1e-6, **without)
    ledger = run.ledger
    assert (ledger["image"] < 0.0).all()
    assert np.linalg.norm(ledger["impulse_images"][-1]) > 0.0
    assert ledger["momentum_residual"].max() <= 1e-13
    assert abs(ledger["energy_residual"][-1]) <= 1e-5
    assert "images" not in off.scenario_text
    assert 0.0 == np.abs(off.ledger["image"]).max()
    pulled, free = track(run).velocity[-1], track(off).velocity[-1]
    assert pulled[:, 2].sum() < free[:, 2].sum()
    assert run.header.images != off.header.images == ""
    assert KINDS[kind]["kind"][:4] in run.header.images or kind == "cylinder"


CAN = {
    "electrodes": {"enclosure": {"radius": "1 mm", "length": "3 mm"}, "field_accuracy": 1e-2},
    "electrode": [
        {
            "name": "ring",
            "voltage": "0 V",
            "shape": [
                {
                    "kind": "rectangle",
                    "low": ["0.7 mm", "-0.1 mm"],
                    "high": ["0.8 mm", "0.1 mm"],
                }
            ],
        }
    ],
}


def test_electrodes_answer_as_a_tube_does_where_they_nearly_are_one(tmp_path: Path) -> None:
    """Within a ring in a can of 1 mm a charge is drawn outwards; accounts close, and none is
    far from what an endless tube of the ring's radius and one of the can's give."""
    place = (0.3e-3, 0.0, 0.0)
    found = []
    for images in (
        {"kind": "electrodes", "panels": 1200},
        {"kind": "cylinder", "radius": "0.7 mm"},
        {"kind": "cylinder", "radius": "1 mm"},
    ):
        more = CAN if images["kind"] == "electrodes" else {}
        run = carried_out(tmp_path, 1e-6, **sections(images, place), **more)
        assert run.ledger["momentum_residual"].max() <= 1e-13
        assert abs(run.ledger["energy_residual"]).max() <= 1e-4
        found.append(float(run.ledger["image"][0]))
    assert found[1] < found[0] < found[2] < 0.0


def test_a_record_of_before_is_read_as_one_without_images(tmp_path: Path) -> None:
    """Format 1 had neither the attribute nor the ledger's columns."""
    run = carried_out(tmp_path, 1e-6, **sections(PLANE))
    (facts,) = run.segments
    with h5py.File(run.folder / facts.name, "r+") as file:
        old = file["ledger"][()]
        names = [name for name in old.dtype.names if "image" not in name]
        made = np.zeros(old.shape, [(name, old.dtype[name]) for name in names])
        for name in names:
            made[name] = old[name]
        del file["ledger"]
        file["ledger"] = made
        for entry in HEADER:
            if entry.since > 1:
                del file.attrs[entry.name]
        file.attrs["format_version"] = 1
        assert "" == header_of(file).images
    changed = replace(facts, bytes=(run.folder / facts.name).stat().st_size)
    ledger = Run(run.folder, run.header, [changed]).rows("ledger")
    assert old["kinetic"].tobytes() == ledger["kinetic"].tobytes()
    assert 0.0 == np.abs(ledger["image"]).max()


def test_the_closest_distance_is_what_steps_follow_and_far_less_than_the_cloud_s() -> None:
    """0.3 rad in a step for an ion at rest; two steps of a fast one; a fiftieth of the distance."""
    q, m = np.array([1.602176634e-19]), np.array([6.6e-26])
    rest, away = np.zeros((3, 1)), np.array([1e-3])
    c = followed(1e-9, q, m, rest, away)
    rate2 = 8.987551786e9 * q[0] ** 2 / (4.0 * m[0] * c**3)
    assert 0.3 == pytest.approx(1e-9 * rate2**0.5, rel=1e-6)
    fast = np.array([[0.0], [1e3], [0.0]])
    assert 2e-6 == pytest.approx(followed(1e-9, q, m, fast, away), rel=1e-12)
    assert 2e-5 == pytest.approx(followed(1e-9, q, m, 1e3 * fast, away), rel=1e-12)
    assert 0.0 == followed(1e-9, q[:0], m[:0], rest[:, :0], away[:0])
