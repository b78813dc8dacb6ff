"""A run of sources alone: what its record holds of births, and what questions make of it."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

from tests.running import answers, carried_out, species

WHOLE = 10e-6


def test_births_stand_in_the_record_and_answers_count_the_charges_born(tmp_path: Path) -> None:
    """Four charges fly 1 mm to a wall in 1 us, one is born too late, one after the end."""
    (tmp_path / "births.csv").write_text(
        "t [us], x [mm], y [mm], z [mm], vx [m/s], vy [m/s], vz [m/s]\n"
        "1.2, 0, 0, 0, 0, 0, 1000\n2.5, 1, 0, 0, 0, 0, 1000\n2.6, 2, 0, 0, 0, 0, 1000\n"
        "6.2, 3, 0, 0, 0, 0, 1000\n9.5, 4, 0, 0, 0, 0, 1000\n20, 5, 0, 0, 0, 0, 1000\n"
    )
    source = {
        "name": "stream",
        "species": "ion",
        "emitter": {"kind": "file", "path": "births.csv"},
        "weight": 3,
    }
    asked = [
        {"name": "at once", "ask": "fraction-left", "of": "stream", "at": "3 us"},
        {"name": "left", "ask": "fraction-left", "of": "stream"},
        {"name": "through", "ask": "fraction-through", "of": "screen", "cloud": "stream"},
        {"name": "x", "ask": "centre", "of": "stream", "axis": "x"},
    ]
    run = carried_out(
        tmp_path,
        WHOLE,
        species={"ion": species(1e-25)},
        source=[source],
        detector=[
            {"name": "screen", "kind": "plane", "at": ["0 mm", "0 mm", "0.75 mm"]},
        ],
        wall=[{"name": "end", "kind": "plane", "at": ["0 mm", "0 mm", "1 mm"]}],
        coulomb={"method": "off"},
        stepping={"step": "0.3 us"},
        record={"every": "1 us"},
        question=asked,
    )
    born = run.births()
    assert [1.2e-6, 2.5e-6, 2.6e-6, 6.2e-6, 9.5e-6] == pytest.approx(
        born["time"], rel=1e-12, abs=0.0
    )
    assert [0, 1, 2, 3, 4] == born["id"].tolist()
    assert [0.0, 1e-3, 2e-3, 3e-3, 4e-3] == pytest.approx(
        born["position"][:, 0], rel=1e-12, abs=0.0
    )
    assert [3.0] * 5 == born["weight"].tolist()
    assert [2, 5] == [run.born("stream", 2.5e-6), run.born("stream")]
    assert run.clouds["stream"].emitted
    assert 5 == run.clouds["stream"].count
    assert [0, 0, 1, 2, 0, 0, 0, 1, 0, 0, 1] == run.moments("stream").count.tolist()
    assert (0, 1) == (len(run.snapshot(0.0).id), len(run.snapshot(WHOLE).id))
    assert 15.0 == run.ledger["count_born"][-1]
    assert born["time"][:4] + 1e-6 == pytest.approx(run.losses()["time"], rel=1e-9, abs=0.0)
    assert born["time"][:4] + 0.75e-6 == pytest.approx(run.crossings()["time"], rel=1e-9, abs=0.0)
    assert [2 / 3, 1 / 5, 4 / 5, 4e-3] == pytest.approx(answers(run), rel=1e-12, abs=0.0)
    assert np.isnan(run.moments("stream").centre[0, 0])
