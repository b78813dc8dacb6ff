"""What a player shows of a run: which charges and records, where, and what becomes of them."""

from __future__ import annotations

import json
from base64 import b64decode
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np
import pytest
from pictured_run import Charges, charges, lost, pictured_run
from played import AROUND, NASTY, scenario_in

from driftwell.answers.evidence import CloudFacts
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.geometry.solid import Mesh
from driftwell.record.reader import Run
from driftwell.report.player.choice import (
    MOST_CHARGES,
    MOST_PIECES,
    cloud_of,
    columns_shown,
    records_shown,
    shares,
)
from driftwell.report.player.data import player_data
from driftwell.report.player.fates import fates_of
from driftwell.report.player.packing import KINDS, page_json, quantised, speeds
from driftwell.report.player.player import player
from driftwell.report.player.surfaces.all import surfaces_of
from driftwell.report.player.surfaces.mesh import fewer
from driftwell.report.player.ways import ways_of


def values(block: dict[str, str]) -> np.ndarray:
    return np.frombuffer(b64decode(block["bytes"]), KINDS[block["kind"]])


@pytest.fixture(scope="module")
def pictured_beam(run_of: Callable[[str], Run]) -> Run:
    return run_of("beam")


def clouds(*counts: int) -> tuple[CloudFacts, ...]:
    firsts = np.cumsum([0, *counts])
    return tuple(
        CloudFacts(f"cloud {k}", k, "ion", 1.0, 1.0, 1.0, int(firsts[k]), count)
        for k, count in enumerate(counts)
    )


def test_each_cloud_is_shown_by_its_share_and_a_small_one_whole() -> None:
    assert [10, 20] == shares([10, 20])
    large, small = shares([100_000, 40])
    assert 40 == small
    assert pytest.approx(MOST_CHARGES, rel=0.03, abs=0.0) == large


@pytest.mark.parametrize("records", [50, 500])
def test_of_very_many_charges_those_are_taken_that_lie_in_few_pieces(records: int) -> None:
    facts = clouds(60_000, 40_000)
    chosen = columns_shown(np.arange(100_000), facts, records)
    assert pytest.approx(MOST_CHARGES, rel=0.02, abs=0.0) == len(chosen.column)
    assert np.all(np.diff(chosen.column) > 0)
    assert pytest.approx(0.6, rel=0.02, abs=0.0) == np.mean(chosen.cloud == 0)
    pieces = np.unique(chosen.column // 200)
    if records == 500:
        assert len(pieces) <= MOST_PIECES + len(facts)
    # and they are spread over all of them
    assert chosen.column[0] < 2000
    assert chosen.column[-1] > 98_000
    np.testing.assert_array_equal(cloud_of(chosen.column, facts), chosen.cloud)


def test_records_are_thinned_evenly_to_what_a_page_can_hold() -> None:
    assert 500 == len(records_shown(500, 1500))
    found = records_shown(5000, 1500)
    assert 500 == len(found)
    assert (0, 4999) == (found[0], found[-1])
    assert {10, 11} >= set(np.diff(found).tolist())


def test_places_are_kept_to_a_part_of_what_each_charge_covers() -> None:
    draw = np.random.default_rng(1)
    places = draw.normal(size=(5, 40, 3)) * np.array([1e-6, 1.0, 1e-3, 1e3, 0.0])[:, None, None]
    places[2, 30:] = np.nan
    packed = quantised(places)
    back = packed.low[:, None] + packed.number / 65534 * packed.span[:, None]
    assert np.all(packed.number[2, 30:] == 65535)
    known = np.isfinite(places)
    allowed = np.broadcast_to(0.5001 / 65534 * packed.span[:, None], places.shape)
    assert np.all(np.abs(back - places)[known] <= allowed[known])
    assert np.abs(back - places)[3].max() > 1e-5 * 1e3 / 65534  # it can fail


def test_speeds_are_those_of_the_laboratory() -> None:
    """beta gamma = 0.75 is 0.6 c (0.36 + 0.64 = 1), and slow ones are as they are."""
    proper = np.array([[[0.0, 0.75 * SPEED_OF_LIGHT, 0.0], [3.0, 0.0, 4.0]]])
    expected = pytest.approx([0.6 * SPEED_OF_LIGHT, 5.0], rel=1e-15, abs=0.0)
    assert expected == speeds(proper)[0]


def test_the_places_in_the_page_are_those_of_the_record(pictured_beam: Run) -> None:
    ways = ways_of(pictured_beam)
    assert ways is not None
    time, state = pictured_beam.trajectory
    np.testing.assert_array_equal(time, ways.time)
    np.testing.assert_array_equal(state.transpose(1, 0, 2), ways.state)
    data = player_data(pictured_beam, ways, None)
    number = values(data["place"]["number"]).reshape(900, len(time), 3)
    low, span = (values(data["place"][name]).reshape(900, 3) for name in ("low", "span"))
    back = low[:, None] + number / 65534 * span[:, None]
    there = np.isfinite(ways.state[:, :, 0])
    assert pytest.approx(back[there], rel=0.0, abs=1e-5) == ways.state[:, :, :3][there]


def test_lost_charges_end_where_and_when_they_were_lost(pictured_beam: Run) -> None:
    ways = ways_of(pictured_beam)
    assert ways is not None
    fates = fates_of(pictured_beam, ways)
    rows = pictured_beam.losses()
    assert 300 == np.sum(fates.wall >= 0)
    for row in rows[::50]:
        place = np.searchsorted(ways.id, row["id"])
        assert row["time"] == fates.lost[place]
        assert row["wall"] == fates.wall[place]
        np.testing.assert_array_equal(row["position"], fates.end[place])
    assert np.all(np.isinf(fates.lost[fates.wall < 0]))
    assert np.all(fates.born == -np.inf)


def test_snapshots_are_shown_where_few_charges_were_tracked(tmp_path: Path) -> None:
    start = charges(400)
    records = [
        (1e-6 * k, Charges(start.position * (1 + 0.1 * k), start.velocity)) for k in range(15)
    ]
    run = pictured_run(tmp_path / "run", records, snapshots=range(15), tracks=5)
    ways = ways_of(run)
    assert ways is not None
    assert ("snapshots", 400, 15) == (ways.source, len(ways.id), len(ways.time))
    np.testing.assert_allclose(records[7][1].position, ways.state[:, 7, :3], rtol=1e-15)
    parts = player(run, None)
    assert parts is not None
    assert "All 400 charges shown, at 15 snapshots" in parts.markup


def test_a_record_without_charges_has_no_player(tmp_path: Path) -> None:
    none = Charges(np.zeros((0, 3)), np.zeros((0, 3)))
    assert player(pictured_run(tmp_path / "run", [(0.0, none), (1e-6, none)]), None) is None


def test_every_kind_of_surface_is_drawn_whole(tmp_path: Path) -> None:
    loaded = scenario_in(tmp_path)
    reach = np.array([1e-3, 1e-3, 5e-3])
    found = surfaces_of(loaded.scenario, loaded.folder, -reach, reach, np.zeros(3))
    drawn = {each.name: each for each in found.drawn}
    assert ["bore", "plate", "blades", "chest", "bell", "exit", "far"] == list(drawn)
    bore = drawn["bore"].vertices
    assert pytest.approx(3e-3, rel=1e-6, abs=0.0) == np.hypot(bore[:, 0], bore[:, 1])
    assert np.hypot(*drawn["plate"].vertices.T[:2]).min() == pytest.approx(1e-3, rel=1e-9, abs=0.0)
    assert np.abs(drawn["blades"].vertices[:, 0]).min() == pytest.approx(5e-4, rel=1e-9, abs=0.0)
    assert np.abs(drawn["chest"].vertices).max(axis=0).tolist() == pytest.approx(
        [1e-2, 1e-2, 2e-2], rel=1e-9, abs=0.0
    )
    for each in found.drawn:
        assert pytest.approx(1.0, rel=1e-9, abs=0.0) == np.linalg.norm(each.normals, axis=2)
        assert each.triangles.max() < len(each.vertices)


def test_an_electrode_whose_file_is_missing_is_named_and_the_others_are_drawn(
    tmp_path: Path,
) -> None:
    electrodes = (
        '[electrodes]\ngeometry = "spatial"\n[[electrode]]\nname = "rod"\nvoltage = "1 V"\n'
        'shape = [{ kind = "sphere", centre = ["0 mm", "0 mm", "0 mm"], radius = "1 mm" }]\n'
    )
    loaded = scenario_in(
        tmp_path,
        AROUND.replace("[[wall]]", electrodes + "[[wall]]", 1).replace(
            'shape = { kind = "gaussian", sigma = "10 um" }',
            'shape = { kind = "gaussian", sigma = "10 um", centre = ["0 mm", "0 mm", "2 mm"] }',
        ),
    )
    rod = loaded.scenario.electrode[0]

    class Gone(type(rod.shape[0])):  # type: ignore[misc]
        def solids(self, folder: Path) -> Any:
            raise OSError("gone")

        def files_named(self) -> tuple[str, ...]:
            return ("gone.stl",)

    gone = rod.model_copy(
        update={"name": "gone", "shape": (Gone.model_construct(**dict(rod.shape[0])),)}
    )
    scenario = loaded.scenario.model_copy(update={"electrode": (rod, gone)})
    reach = np.full(3, 1e-3)
    found = surfaces_of(scenario, loaded.folder, -reach, reach, np.zeros(3))
    assert (("gone", "its file is missing: gone.stl"),) == found.missing
    ball = next(each for each in found.drawn if each.name == "rod")
    # a drawing may miss its outline by 0.2 % of the extent, and corners of facets lie inside
    assert pytest.approx(1e-3, rel=0.01, abs=0.0) == np.linalg.norm(ball.vertices, axis=1)


def test_a_fine_mesh_becomes_coarse_without_losing_its_size() -> None:
    polar, around = np.meshgrid(np.linspace(0.0, np.pi, 120), np.linspace(0.0, 2 * np.pi, 240))
    points = np.stack(
        [np.sin(polar) * np.cos(around), np.sin(polar) * np.sin(around), np.cos(polar)], axis=2
    ).reshape(-1, 3)
    i, j = (k.ravel() for k in np.meshgrid(np.arange(239), np.arange(119), indexing="ij"))
    a = 120 * i + j
    faces = np.concatenate(
        [np.stack([a, a + 1, a + 121], axis=1), np.stack([a, a + 121, a + 120], axis=1)]
    )
    found = fewer(Mesh(points, faces, True), 3000)
    assert 300 < len(found.triangles) <= 3000
    assert pytest.approx(1.0, rel=0.1, abs=0.0) == np.linalg.norm(found.vertices, axis=1)


def test_names_cannot_leave_the_data_or_the_markup(tmp_path: Path) -> None:
    assert {"name": NASTY} == json.loads(page_json({"name": NASTY}))
    assert not set("<>&\u2028") & set(page_json({"name": NASTY}))
    start = charges(4)
    run = pictured_run(
        tmp_path / "run",
        [(0.0, start), (1e-6, start)],
        title=NASTY,
        names=(NASTY,),
        walls=(NASTY,),
        losses=lost(np.array([5e-7]), np.zeros((1, 3))),
    )
    parts = player(run, None)
    assert parts is not None
    assert "<img" not in parts.markup
    assert 1 == parts.markup.count("</script")


def test_the_curves_of_several_clouds_add_up(pictured_beam: Run) -> None:
    ways = ways_of(pictured_beam)
    assert ways is not None
    curves = player_data(pictured_beam, ways, None)["curves"]
    whole, *own = curves["groups"]
    assert 2 == len(own)
    np.testing.assert_array_equal(
        values(whole["alive"]), sum(values(group["alive"]) for group in own)
    )
    _, state = pictured_beam.trajectory
    expected = np.nanstd(state[:, :, 0], axis=1)
    assert pytest.approx(expected, rel=1e-5, abs=0.0) == values(whole["size"][0])
