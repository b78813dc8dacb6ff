"""Electrodes that do not fit together, and charges that begin inside one, are told of."""

from __future__ import annotations

import math
from pathlib import Path
from typing import Any

import pytest

from driftwell.errors import ScenarioError
from driftwell.scenario.explain import explain
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.running import points
from tests.scenario.good_scenarios import toml_file


def ring(name: str, low: float, high: float, r: tuple[float, float] = (5.0, 6.0)) -> dict[str, Any]:
    """A tube from z = low to high, mm."""
    corners = [[f"{r[0]} mm", f"{low} mm"], [f"{r[1]} mm", f"{high} mm"]]
    return {
        "name": name,
        "voltage": "10 V",
        "shape": [{"kind": "rectangle", "low": corners[0], "high": corners[1]}],
    }


def rod(name: str, x: float, y: float, radius: float = 2.0) -> dict[str, Any]:
    """A circle in the plane, mm."""
    shape = {"kind": "circle", "centre": [f"{x} mm", f"{y} mm"], "radius": f"{radius} mm"}
    return {"name": name, "voltage": "10 V", "shape": [shape]}


def read(
    folder: Path, at: tuple[float, float, float] = (0, 0, 0), **sections: Any
) -> LoadedScenario:
    """The scenario of one proton at a place, mm, and these sections."""
    cloud = points("one", "proton", [[1e-3 * x for x in at]])
    whole = {"title": "electrodes", "duration": "1 us", "cloud": [cloud], **sections}
    path = folder / "electrodes.toml"
    path.write_text(toml_file(whole))
    return read_scenario(path)


def fault(folder: Path, *args: Any, **sections: Any) -> str:
    with pytest.raises(ScenarioError) as told:
        read(folder, *args, **sections)
    return str(told.value)


def test_electrodes_that_leave_a_gap_are_well(tmp_path: Path) -> None:
    loaded = read(tmp_path, electrode=[ring("a", -4, 0), ring("b", 1e-6, 4), ring("c", 5, 9)])
    assert "a" == loaded.scenario.electrode[0].name
    text = "\n".join(explain(loaded))
    assert "axisymmetric, field to 0.0001 of its rms" in text
    assert "10 V: rectangle from (5 mm, -4 mm) to (6 mm, 0 m)" in text


@pytest.mark.parametrize(("low", "word"), [(0.0, "touches"), (-1.0, "overlaps with")])
def test_electrodes_that_meet_are_refused(tmp_path: Path, low: float, word: str) -> None:
    told = fault(tmp_path, electrode=[ring("a", -4, 0), ring("b", low, 4)])
    assert f'[[electrode]] "a": {word} "b"' in told
    assert "leave a gap" in told


def test_round_electrodes_are_seen_touching_in_one_point(tmp_path: Path) -> None:
    """Two circles side by side at any angle, a billionth apart or more; and one in the other."""
    planar = {"geometry": "planar"}
    x, y = 4.0 * math.cos(0.7), 4.0 * math.sin(0.7)
    told = fault(tmp_path, (0, 9, 0), electrodes=planar, electrode=[rod("a", 0, 0), rod("b", x, y)])
    assert '"a": touches "b"' in told
    apart = 1.0 + 1e-6
    read(
        tmp_path,
        (0, 9, 0),
        electrodes=planar,
        electrode=[rod("a", 0, 0), rod("b", apart * x, y * apart)],
    )
    told = fault(
        tmp_path, (0, 9, 0), electrodes=planar, electrode=[rod("a", 0, 0), rod("b", 0.5, 0, 0.5)]
    )
    assert "overlaps with" in told


def test_a_hollow_electrode_may_hold_another(tmp_path: Path) -> None:
    read(tmp_path, electrode=[ring("outer", -9, 9), ring("inner", -2, 2, (3.0, 4.0))])


def test_drawings_belong_to_drawn_geometries(tmp_path: Path) -> None:
    told = fault(tmp_path, electrodes={"geometry": "spatial"}, electrode=[rod("a", 9, 9)])
    assert "is drawn in a plane, and [electrodes] geometry is spatial" in told


def test_what_is_turned_about_the_axis_stays_on_its_side(tmp_path: Path) -> None:
    told = fault(tmp_path, (0, 0, 9), electrode=[rod("a", 1.0, 0.0)])
    assert "the circle meets the axis" in told


def test_electrodes_without_an_electrode_are_refused(tmp_path: Path) -> None:
    assert "[electrodes]: there is no [[electrode]]" in fault(tmp_path, electrodes={})


@pytest.mark.parametrize(
    ("geometry", "can", "told"),
    [
        ("axisymmetric", {"radius": "9 mm"}, "length"),
        ("axisymmetric", {"radius": "9 mm", "length": "9 mm", "size": ["1 m"] * 3}, "size"),
        ("planar", {"radius": "9 mm", "length": "9 mm"}, "length"),
        ("planar", {}, "radius"),
    ],
)
def test_an_enclosure_has_the_sizes_of_its_geometry(
    tmp_path: Path, geometry: str, can: dict[str, Any], told: str
) -> None:
    common = {"geometry": geometry, "enclosure": can}
    assert f"enclosure.{told}" in fault(tmp_path, electrodes=common, electrode=[rod("a", 5, 5)])


@pytest.mark.parametrize(
    ("radius", "told"), [("9 mm", ""), ("5.5 mm", 'touches "enclosure"'), ("4 mm", "lies outside")]
)
def test_an_enclosure_encloses(tmp_path: Path, radius: str, told: str) -> None:
    common = {"enclosure": {"radius": radius, "length": "40 mm"}}
    if not told:
        read(tmp_path, electrodes=common, electrode=[ring("a", -4, 4)])
    else:
        assert told in fault(tmp_path, electrodes=common, electrode=[ring("a", -4, 4)])


def test_names_of_surfaces_are_told_apart(tmp_path: Path) -> None:
    walls = [{"name": "a", "kind": "cylinder", "radius": "20 mm"}]
    told = fault(tmp_path, wall=walls, electrode=[ring("a", -4, 0)])
    assert '"a": is the name of a [[wall]] already' in told
    can = {"enclosure": {"radius": "20 mm", "length": "40 mm"}}
    told = fault(tmp_path, electrodes=can, electrode=[ring("enclosure", -4, 0)])
    assert "is the name of [electrodes] enclosure already" in told
    assert "[[electrode]] number 1" in fault(
        tmp_path, electrode=[ring("b", -4, 0), ring("b", 1, 2)]
    )


def test_a_charge_born_inside_an_electrode_is_refused(tmp_path: Path) -> None:
    """It is named with its cloud, the electrode and the place; on the surface it may begin."""
    common = {"centre": ["0 mm", "0 mm", "100 mm"]}
    told = fault(tmp_path, (0, 5.5, 99), electrodes=common, electrode=[ring("lens", -4, 4)])
    assert '[[cloud]] "one"' in told
    assert '1 of 1 charges begins inside the electrode "lens", charge 0' in told
    assert "(0 m, 5.5 mm, 99 mm)" in told
    read(tmp_path, (0, 5.0, 99), electrodes=common, electrode=[ring("lens", -4, 4)])
    read(tmp_path, (0, 5.5, 3), electrodes=common, electrode=[ring("lens", -4, 4)])
    common["enclosure"] = {"radius": "9 mm", "length": "40 mm"}  # type: ignore[assignment]
    told = fault(tmp_path, (0, 5.5, 3), electrodes=common, electrode=[ring("lens", -4, 4)])
    assert "outside [electrodes] enclosure" in told


def test_without_electrodes_a_digest_is_what_it_was(tmp_path: Path) -> None:
    """Of driftwell before there were electrodes: runs of then go on, sweeps find theirs."""
    expected = "268a049d916d367647b44e07bc85b18186c6a2c521cfeb6de173250ed89793fc"
    assert expected == read(tmp_path).digest
