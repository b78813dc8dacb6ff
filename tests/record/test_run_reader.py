"""The reader as evidence for answers, and what it says where there is nothing to read."""

from __future__ import annotations

import tracemalloc
from dataclasses import fields
from pathlib import Path

import h5py
import numpy as np
import pytest
from invented_run import ANSWERS, FINISHED, Recorded, invented_header, invented_run, record_segment

from driftwell import open_run
from driftwell.answers.evidence import Moments, TraceRequest
from driftwell.errors import AnswerError, RecordError
from driftwell.record.header import trace_name
from driftwell.record.layout import COUNTERS, FORMAT_VERSION
from driftwell.record.writer import RunWriter


def open_files() -> list[str]:
    """Names of the HDF5 files this process holds open."""
    links = [each for each in Path("/proc/self/fd").iterdir() if each.is_symlink()]
    return [str(each.readlink()) for each in links if each.readlink().suffix == ".h5"]


def test_clouds_detectors_softening_and_end_time_are_facts_of_the_run(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    run = open_run(tmp_path / "run")
    header = invented_header()
    assert {cloud.name: cloud for cloud in header.clouds} == run.clouds
    assert header.detectors == run.detectors
    assert header.softening == run.softening
    assert header.scenario == run.scenario_text
    last = max(recorded.all_rows("ledger")["time"].max(), *run.snapshots)
    assert last == run.end_time


def test_moments_are_those_of_the_one_cloud(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    found = open_run(tmp_path / "run").moments("wölk 1")
    table = recorded.all_rows("moments")
    expected = table[table["cloud"] == 1]
    assert len(expected) > 10
    for each in fields(Moments):
        assert expected[each.name].tobytes() == getattr(found, each.name).tobytes(), each.name
    assert (len(expected), 6, 6) == found.covariance.shape


def test_a_trace_is_found_by_what_it_traces_not_by_its_cadence(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    times, values = open_run(tmp_path / "run").trace(TraceRequest("wölk 0", 1, 2, 3e-7))
    assert recorded.all_rows("trace/time").tobytes() == times.tobytes()
    assert recorded.all_rows("trace/value")[:, 1].tobytes() == values.tobytes()


def test_names_of_traces_differ_where_the_requests_differ():
    requests = [
        TraceRequest(cloud, charge, axis, None)
        for cloud in ("a", "b", "a centre x", "a charge 3")
        for charge in (None, 0, 3)
        for axis in range(3)
    ]
    assert len(requests) == len({trace_name(request) for request in requests})
    assert "a centre z" == trace_name(TraceRequest("a", None, 2, None))


def test_what_was_not_recorded_is_said_with_what_was(tmp_path):
    invented_run(tmp_path / "run")
    run = open_run(tmp_path / "run")
    with pytest.raises(AnswerError, match=r"no snapshot at t = 0\.5 s; .* at 0, 1, 2 s"):
        run.snapshot(0.5)
    with pytest.raises(AnswerError, match='no cloud "load"; clouds are wölk 0, wölk 1'):
        run.moments("load")
    with pytest.raises(AnswerError, match='"load centre x" was not traced; traced are wölk 0'):
        run.trace(TraceRequest("load", None, 0, None))
    with pytest.raises(RecordError, match="charge 1 was not tracked"):
        run.track(1)


def test_a_snapshot_is_found_to_a_billionth_of_the_duration(tmp_path):
    """The duration is 1 s."""
    invented_run(tmp_path / "run")
    run = open_run(tmp_path / "run")
    assert 1.0 == run.snapshot(1.0 + 0.9e-9).time
    with pytest.raises(AnswerError):
        run.snapshot(1.0 + 1.1e-9)


def test_one_charge_is_followed_through_all_segments(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    times, states = open_run(tmp_path / "run").track(4)
    assert recorded.all_rows("trajectory/time").tobytes() == times.tobytes()
    assert recorded.all_rows("trajectory/state")[:, 2].tobytes() == states.tobytes()


def test_a_run_that_is_still_going_on_is_read_as_far_as_it_was_sealed(tmp_path):
    folder = tmp_path / "run"
    writer = RunWriter.create(folder, invented_header())
    recorded = Recorded()
    run = open_run(folder)
    assert ("unfinished", 0.0, (), 0) == (
        run.outcome.word,
        run.end_time,
        run.answers,
        len(run.ledger),
    )
    assert {} == run.state()
    for k in range(3):
        record_segment(writer, recorded, dict.fromkeys(COUNTERS, k + 1), (), float(k), k)
        assert recorded.all_rows("ledger").tobytes() == open_run(folder).ledger.tobytes()
    assert 0 == len(run.ledger)
    assert "unfinished" == open_run(folder).outcome.word
    writer.finish(FINISHED, ANSWERS)
    assert "finished" == open_run(folder).outcome.word


def test_no_file_stays_open(tmp_path):
    writer, _ = invented_run(tmp_path / "run")
    writer.finish(FINISHED, ANSWERS)
    run = open_run(tmp_path / "run")
    assert [] == open_files()
    _ = run.ledger, run.trajectory, run.losses(), run.state(), run.snapshot(1.0), run.answers
    assert [] == open_files()
    with h5py.File(tmp_path / "run" / "run.h5") as master:
        assert [str(tmp_path / "run" / "run.h5")] == open_files()
        assert 30 == len(master["trajectory/time"])


def test_arrays_given_out_are_the_readers_own(tmp_path):
    """Changing one does not change what is given out next."""
    _, recorded = invented_run(tmp_path / "run")
    run = open_run(tmp_path / "run")
    run.ledger["kinetic"][:] = 1.0
    assert recorded.all_rows("ledger").tobytes() == run.ledger.tobytes()


def test_opening_reads_no_trajectories(tmp_path):
    """8 MB of trajectories; opening takes a small part of that in memory."""
    writer = RunWriter.create(tmp_path / "run", invented_header(tracked=1000))
    for k in range(160):
        writer.trajectory(float(k), np.ones((1000, 6)))
    writer.seal({})
    tracemalloc.start()
    open_run(tmp_path / "run")
    _, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert peak < 1_000_000


def test_a_run_is_opened_by_folder_or_by_master(tmp_path):
    invented_run(tmp_path / "run", segments=1)
    assert invented_header().title == open_run(str(tmp_path / "run")).header.title
    assert invented_header().title == open_run(tmp_path / "run" / "run.h5").header.title


@pytest.mark.parametrize("name", ["absent", "empty", "file"])
def test_where_there_is_no_run_it_says_so(tmp_path, name):
    (tmp_path / "empty").mkdir()
    (tmp_path / "file").write_text("text")
    with pytest.raises(RecordError, match=rf"{name}: no run found; a run's folder .* is needed"):
        open_run(tmp_path / name)


def test_a_newer_format_is_refused_with_the_version_that_reads_it(tmp_path):
    RunWriter.create(tmp_path / "run", invented_header())
    with h5py.File(tmp_path / "run" / "run.h5", "r+") as file:
        file.attrs["format_version"] = FORMAT_VERSION + 1
        file.attrs["driftwell_version"] = "9.1"
    with pytest.raises(
        RecordError,
        match=rf"format {FORMAT_VERSION + 1}, .* reads up to {FORMAT_VERSION}; .* driftwell 9\.1",
    ):
        open_run(tmp_path / "run")
