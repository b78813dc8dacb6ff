"""The lines of `driftwell info RUN`."""

from __future__ import annotations

import numpy as np
import pytest
from invented_run import ANSWERS, FINISHED, invented_header, invented_particles

from driftwell import open_run
from driftwell.record.layout import rows
from driftwell.record.summary import summary
from driftwell.record.writer import RunWriter


@pytest.fixture
def writer(tmp_path):
    """A run of two records: 3 of cloud 1 lost on the plate, 2 passages, a residual that peaked."""
    writer = RunWriter.create(tmp_path / "run", invented_header())
    for time, residual in ((0.5, -3e-9), (0.75, 2e-10)):
        writer.trajectory(time, np.zeros((3, 6)))
        row = rows("ledger", 1)
        row["time"], row["energy_residual"] = time, residual
        writer.ledger(row)
    lost = rows("losses", 3)
    lost["cloud"], lost["wall"] = 1, 1
    writer.losses(lost)
    writer.crossings(rows("crossings", 2))
    writer.snapshot(0.75, invented_particles(4))
    writer.seal({})
    return writer


def test_it_says_what_the_run_is_how_it_ended_and_what_it_holds(writer):
    writer.finish(FINISHED, ANSWERS)
    lines = summary(open_run(writer.folder))
    assert "Invented cloud, Größe 3 µm" == lines[0]
    assert "finished: The run reached its end." == lines[1]
    assert "reached 750 ms of 1 s" == lines[2]
    assert "2000 steps in 1.5 s by the clock" == lines[3]
    text = "\n".join(lines)
    for expected in (
        "wölk 0: 100 barium; 100 left",
        "wölk 1: 100 barium, each standing for 2; 97 left, 3 lost on plate",
        "detector exit: 2 passages",
        "energy            residual  2.00e-10 at the end, 3.00e-09 at most",
        "gås gave ",
        "trajectory/state: 2 x 3 x 6, 288 bytes",
        "snapshots: 1",
        "1 segment, 2",
        "held fraction  0.9700 ± 0.0040",
        "h5py",
        open_run(writer.folder).header.scenario_sha256,
    ):
        assert expected in text
    assert "damage" not in text


def test_a_run_that_has_not_ended_says_so(writer):
    lines = summary(open_run(writer.folder))
    assert lines[1].startswith("unfinished: The run is still going on or was cut off")
    assert "  unfinished" == lines[lines.index("answers") + 1]


def test_a_run_that_has_just_begun_has_a_summary(tmp_path):
    RunWriter.create(tmp_path / "run", invented_header())
    lines = summary(open_run(tmp_path / "run"))
    assert "reached 0 s of 1 s" == lines[2]
    assert "  no row sealed yet" in lines


def test_damage_is_shown_and_the_rest_too(writer):
    (writer.folder / "segments" / "000001.h5").unlink()
    lines = summary(open_run(writer.folder))
    assert lines[lines.index("ledger") + 1].startswith("  cannot be read: ")
    assert "000001.h5: missing" in lines[lines.index("damage") + 1]
    assert "  trajectory/state: 2 x 3 x 6, 288 bytes" in lines


def test_the_command_and_the_settings_that_make_the_run_again_are_told(writer):
    text = "\n".join(summary(open_run(writer.folder)))
    assert "settings: 'duration=1 s' seed=7" in text
    assert "made by: driftwell run invented.toml --set 'duration=1 s' --set seed=7" in text
    assert "digest of the content: 0123456789abcdef" in text
