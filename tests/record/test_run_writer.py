"""The writer: what it refuses, when it seals, what it copies."""

from __future__ import annotations

import numpy as np
import pytest
from invented_run import FINISHED, invented_header, invented_particles, invented_run

from driftwell import open_run
from driftwell.errors import RecordError
from driftwell.record.layout import rows
from driftwell.record.sealing import longest_wait, most_bytes
from driftwell.record.writer import RunWriter


class Clock:
    """Time by the clock, s, set by hand."""

    def __init__(self) -> None:
        self.now = 1000.0

    def __call__(self) -> float:
        return self.now


def everything_below(folder):
    return {path: path.read_bytes() for path in folder.rglob("*") if path.is_file()}


def test_a_folder_that_holds_a_run_is_refused_and_left_as_it_is(tmp_path):
    invented_run(tmp_path / "run", segments=1)
    before = everything_below(tmp_path)
    with pytest.raises(
        RecordError, match=r"holds run\.h5 and segments already; .* Name a new folder with -o"
    ):
        RunWriter.create(tmp_path / "run", invented_header())
    assert before == everything_below(tmp_path)


def test_a_folder_with_another_scenario_is_refused_and_left_as_it_is(tmp_path):
    (tmp_path / "scenario.toml").write_text('title = "mine"\n')
    before = everything_below(tmp_path)
    with pytest.raises(RecordError, match=r"holds another scenario\.toml already"):
        RunWriter.create(tmp_path, invented_header())
    assert before == everything_below(tmp_path)
    assert not (tmp_path / "segments").exists()


def test_a_folder_with_other_files_or_the_same_scenario_is_taken(tmp_path):
    (tmp_path / "notes.txt").write_text("kept")
    (tmp_path / "scenario.toml").write_text(invented_header().scenario, "utf-8")
    RunWriter.create(tmp_path, invented_header())
    assert "kept" == (tmp_path / "notes.txt").read_text()
    assert invented_header().title == open_run(tmp_path).header.title


def test_a_folder_that_cannot_be_made_is_told(tmp_path):
    (tmp_path / "file").write_text("text")
    with pytest.raises(RecordError, match="file: is a file; a run needs a folder"):
        RunWriter.create(tmp_path / "file", invented_header())
    with pytest.raises(RecordError, match=r"lies below the file .*; a run needs a folder"):
        RunWriter.create(tmp_path / "file" / "run", invented_header())


def test_arrays_are_copied_when_given(tmp_path):
    """The run fills the same arrays again for the next record."""
    writer = RunWriter.create(tmp_path / "run", invented_header())
    state, ledger, moments = np.ones((3, 6)), rows("ledger", 1), rows("moments", 2)
    losses, values, times = rows("losses", 1), np.ones((1, 2)), np.ones(1)
    particles = invented_particles(3)
    weights = particles.weight.copy()
    writer.trajectory(0.5, state)
    writer.ledger(ledger[0])
    writer.moments(0.5, moments)
    writer.losses(losses)
    writer.trace(times, values)
    writer.snapshot(0.5, particles)
    for array in (state, values, times, particles.weight, particles.position):
        array[:] = 99.0
    for table in (ledger, moments, losses):
        table["time"] = 99.0
    writer.seal({})
    run = open_run(tmp_path / "run")
    assert 1.0 == run.trajectory[1].max()
    assert (0.0, 0.0) == (run.ledger["time"][0], run.losses()["time"][0])
    assert [0.5] == run.moments("wölk 1").time.tolist()
    assert (1.0, 1.0) == (run.rows("trace/time")[0], run.rows("trace/value").max())
    assert weights.tolist() == run.snapshot(0.5).weight.tolist()


@pytest.mark.parametrize(
    ("method", "arguments", "words"),
    [
        ("trajectory", (0.0, np.zeros((2, 6))), r"\(2, 6\), \(3, 6\) needed"),
        ("ledger", (rows("losses", 1),), "not those of the layout"),
        ("trace", ([0.0, 1.0], np.zeros((2, 3))), r"\(3,\), \(2,\) needed"),
        ("trace", ([0.0], np.zeros((2, 2))), "1 times with 2 rows"),
    ],
)
def test_rows_of_the_wrong_shape_are_refused(tmp_path, method, arguments, words):
    writer = RunWriter.create(tmp_path / "run", invented_header())
    with pytest.raises(ValueError, match=words):
        getattr(writer, method)(*arguments)


def test_a_run_cannot_be_finished_over_rows_not_sealed(tmp_path):
    writer, _ = invented_run(tmp_path / "run", segments=1)
    writer.trajectory(9.0, np.zeros((3, 6)))
    with pytest.raises(RecordError, match="152 bytes recorded are not sealed"):
        writer.finish(FINISHED, ())
    writer.seal({})
    writer.finish(FINISHED, ())
    assert FINISHED == open_run(tmp_path / "run").outcome


def test_a_segment_is_due_after_some_time(tmp_path):
    """Also between two records, when it has nothing but the state."""
    clock = Clock()
    writer = RunWriter.create(tmp_path / "run", invented_header(), clock)
    assert not writer.due(0)
    clock.now += 100.0
    assert writer.due(0)
    writer.seal({})
    assert not writer.due(0)
    writer.trajectory(1.0, np.zeros((3, 6)))
    clock.now += 9.9
    assert not writer.due(0)
    clock.now += 0.2
    assert writer.due(0)


def test_a_segment_is_due_by_its_bytes(tmp_path):
    writer = RunWriter.create(tmp_path / "run", invented_header(tracked=100_000), Clock())
    state = np.zeros((100_000, 6))
    for _ in range(6):
        writer.trajectory(0.0, state)
    assert not writer.due(0)
    writer.trajectory(0.0, state)
    assert writer.due(0)


def test_a_night_leaves_hundreds_of_segments():
    """Eight hours cut by time, and a hundred gigabytes cut by bytes."""
    elapsed, cuts = 0.0, 0
    while elapsed < 8 * 3600.0:
        elapsed += longest_wait(elapsed, 0)
        cuts += 1
    assert 600 < cuts < 700
    sealed, cuts = 0, 0
    while sealed < 100e9:
        sealed += most_bytes(sealed, 0)
        cuts += 1
    assert 800 < cuts < 1000


@pytest.mark.parametrize(
    ("elapsed", "expected"), [(0.0, 10.0), (999.0, 10.0), (3000.0, 30.0), (1e5, 60.0)]
)
def test_the_wait_grows_with_the_run_between_ten_and_sixty_seconds(elapsed, expected):
    assert expected == longest_wait(elapsed, 0)


@pytest.mark.parametrize(
    ("charges", "wait", "least"), [(1e3, 10.0, 32e6), (1e6, 208.0, 52e6), (1e7, 900.0, 520e6)]
)
def test_a_large_state_waits_for_rows_or_minutes(charges, wait, least):
    """104 bytes a charge: half as many bytes of rows, or 2 s a megabyte, at most 15 min."""
    state = int(104 * charges)
    assert wait == longest_wait(0.0, state)
    assert least == most_bytes(0, state)
    assert max(wait, 60.0) == longest_wait(1e6, state)


def test_the_writer_asks_how_large_the_state_is(tmp_path):
    """Rows that would be sealed with a small state wait for a large one."""
    clock = Clock()
    writer = RunWriter.create(tmp_path / "run", invented_header(), clock)
    writer.trajectory(0.0, np.zeros((3, 6)))
    clock.now += 11.0
    assert writer.due(0)
    assert not writer.due(16_000_000)
    clock.now += 30.0
    assert writer.due(16_000_000)
