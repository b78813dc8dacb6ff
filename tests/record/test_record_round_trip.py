"""What is recorded is read back bit for bit, by the reader and by plain HDF5."""

from __future__ import annotations

import shutil
import tempfile
from dataclasses import fields
from pathlib import Path

import h5py
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from invented_run import (
    ANSWERS,
    FINISHED,
    Recorded,
    invented_header,
    invented_particles,
    invented_run,
    random_rows,
    record_segment,
)

from driftwell import open_run
from driftwell.answers.evidence import Snapshot
from driftwell.particles.state import Particles
from driftwell.record.layout import COUNTERS, FIXED, HEADER, OUTCOME, ROWS, SNAPSHOT, unit
from driftwell.record.resume_state import particles_of, particles_state
from driftwell.record.writer import RunWriter

COUNTS = st.fixed_dictionaries({counter: st.integers(0, 7) for counter in COUNTERS})


def same_bits(expected: np.ndarray, found: np.ndarray) -> bool:
    return (
        expected.shape == found.shape
        and expected.dtype == found.dtype
        and expected.tobytes() == found.tobytes()
    )


@settings(max_examples=25, deadline=None)
@given(
    segments=st.lists(st.tuples(COUNTS, st.lists(st.integers(0, 5), max_size=2)), max_size=4),
    tracked=st.integers(0, 4),
    clouds=st.integers(1, 3),
    traces=st.integers(0, 3),
    seed=st.integers(0, 2**20),
)
def test_every_dataset_is_read_back_whatever_the_sizes(segments, tracked, clouds, traces, seed):
    """Row counts of all kinds, none included, differ from segment to segment."""
    with tempfile.TemporaryDirectory() as name:
        folder = Path(name) / "run"
        header = invented_header(tracked, clouds, traces)
        writer = RunWriter.create(folder, header)
        recorded = Recorded()
        for k, (counts, snapshots) in enumerate(segments):
            record_segment(writer, recorded, counts, snapshots, float(k), seed + 1000 * k)
        run = open_run(folder)
        assert header == run.header
        with h5py.File(folder / "run.h5", "r") as master:
            for entry in ROWS:
                empty = random_rows(entry.path, 0, header.sizes, 0)
                expected = np.concatenate([empty, *recorded.rows[entry.path]])
                assert same_bits(expected, run.rows(entry.path)), entry.path
                assert same_bits(expected, master[entry.path][()]), entry.path
        assert [time for time, _ in recorded.snapshots] == run.snapshots


def test_answers_and_outcome_are_read_back(tmp_path):
    writer, _ = invented_run(tmp_path / "run")
    writer.finish(FINISHED, ANSWERS)
    run = open_run(tmp_path / "run")
    assert FINISHED == run.outcome
    assert ANSWERS == run.answers
    with h5py.File(tmp_path / "run" / "run.h5") as master:
        assert b"finished" == master["outcome"].attrs["word"]
        assert 0.97 == master["answers"]["value"][0]


def test_a_run_without_questions_ends_with_no_answers(tmp_path):
    writer, _ = invented_run(tmp_path / "run")
    writer.finish(FINISHED, ())
    assert (FINISHED, ()) == (
        open_run(tmp_path / "run").outcome,
        open_run(tmp_path / "run").answers,
    )


def test_a_long_scenario_is_kept_whole(tmp_path):
    """HDF5 keeps attributes beyond 64 kB in another way."""
    given = invented_header()
    values = {each.name: getattr(given, each.name) for each in fields(given)}
    header = type(given)(**values | {"scenario": "# Länge\n" * 30_000})
    RunWriter.create(tmp_path / "run", header).seal({})
    assert header.scenario == open_run(tmp_path / "run").scenario_text
    assert header.scenario == (tmp_path / "run" / "scenario.toml").read_text("utf-8")
    assert header == open_run(tmp_path / "run").header


def test_the_state_at_the_end_of_a_segment_reads_back_bit_for_bit(tmp_path):
    """All that a resume needs: arrays, whole numbers, random streams, flags, odd floats."""
    particles = invented_particles(1500)
    state = particles_state(particles) | {
        "schedule/position": np.int64(2**62 + 1),
        "schedule/recorded": 17,
        "accounts/total": np.array([1e300, -0.0, np.nan, np.inf, 5e-324]),
        "accounts/carry": np.array([1e-17, 0.0]),
        "random": np.array([2**64 - 1, 3], np.uint64),
        "flags": np.array([True, False]),
        "single": np.float32(0.1),
        "none": np.zeros((0, 3)),
    }
    writer = RunWriter.create(tmp_path / "run", invented_header())
    writer.seal({"schedule/position": 1})
    writer.seal(state)
    found = open_run(tmp_path / "run").state()
    assert sorted(state) == sorted(found)
    for name, value in state.items():
        assert same_bits(np.asarray(value), found[name]), name
    again = particles_of(found)
    for each in fields(Particles):
        assert same_bits(getattr(particles, each.name), getattr(again, each.name)), each.name


def test_a_snapshot_holds_every_charge(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    run = open_run(tmp_path / "run")
    for time, particles in recorded.snapshots:
        found = run.snapshot(time)
        expected = Snapshot(
            time,
            particles.id,
            particles.cloud,
            particles.position.T,
            particles.velocity.T,
            particles.charge,
            particles.mass,
            particles.weight,
        )
        for each in fields(Snapshot):
            if each.name == "time":
                assert expected.time == found.time
            else:
                assert same_bits(getattr(expected, each.name), getattr(found, each.name))


def test_plain_hdf5_reads_a_moved_folder_through_the_master(tmp_path, monkeypatch):
    """Unequal segments in one piece, snapshots, state and answers by links, units named."""
    writer, recorded = invented_run(tmp_path / "run")
    writer.finish(FINISHED, ANSWERS)
    shutil.move(tmp_path / "run", tmp_path / "elsewhere" / "archive")
    monkeypatch.chdir("/")
    with h5py.File(tmp_path / "elsewhere" / "archive" / "run.h5") as master:
        assert [5, 10, 15] == [len(rows) for rows in recorded.rows["trajectory/time"]]
        for entry in ROWS:
            stored = master[entry.path]
            assert stored.is_virtual
            assert same_bits(recorded.all_rows(entry.path), stored[()])
            assert entry.help == stored.attrs["help"]
            if entry.columns:
                assert [column.unit for column in entry.columns] == list(stored.attrs["units"])
            else:
                assert entry.unit == stored.attrs["unit"]
        kinetic = recorded.all_rows("ledger")["kinetic"]
        assert same_bits(kinetic, master["ledger"]["kinetic"])
        for k, (_, particles) in enumerate(recorded.snapshots, 1):
            assert sorted(entry.path for entry in SNAPSHOT) == sorted(master[f"snapshot/{k}"])
            assert same_bits(particles.species, master[f"snapshot/{k}/species"][()])
        assert recorded.states[-1]["schedule/step"] == master["state/schedule/step"][()]
        assert {entry.name for entry in HEADER} <= set(master.attrs)
        assert list(invented_header().tracked) == master[FIXED[0].path][()].tolist()
        names = [name.decode() for name in master["trace/value"].attrs["names"]]
        assert list(invented_header().traces) == names
    run = open_run(tmp_path / "elsewhere" / "archive")
    assert same_bits(recorded.all_rows("ledger"), run.ledger)


def test_a_segment_is_a_plain_file_of_its_own(tmp_path):
    """Trajectories are chunked for both directions and all data carry checksums."""
    writer = RunWriter.create(tmp_path / "run", invented_header(tracked=300))
    counts = dict.fromkeys(COUNTERS, 130)
    record_segment(writer, Recorded(), counts, (3000,))
    with h5py.File(tmp_path / "run" / "segments" / "000001.h5") as segment:
        assert (65, 150, 6) == segment["trajectory/state"].chunks
        for path in ("trajectory/state", "moments", "ledger", "losses", "crossings"):
            assert segment[path].fletcher32, path
            assert segment[path].compression is None, path
        assert segment["snapshot/1/position"].fletcher32
        assert 1 == segment.attrs["segment"]
        assert {entry.name for entry in HEADER} <= set(segment.attrs)


@pytest.mark.parametrize("records", [1, 101, 201])
def test_a_segment_is_hardly_larger_than_what_it_holds(tmp_path, records):
    """Chunks are stored whole; a last one with a single row must not cost a hundred."""
    writer = RunWriter.create(tmp_path / "run", invented_header(tracked=401))
    for k in range(records):
        writer.trajectory(float(k), np.ones((401, 6)))
    writer.seal({})
    size = (tmp_path / "run" / "segments" / "000001.h5").stat().st_size
    held = records * 401 * 48
    assert held < size < 1.03 * held + 40_000


@pytest.mark.parametrize(
    ("path", "column", "expected"),
    [("ledger", "kinetic", "J"), ("losses", "velocity", "m/s"), ("trace/time", "", "s")],
)
def test_the_reader_names_units(tmp_path, path, column, expected):
    RunWriter.create(tmp_path / "run", invented_header())
    assert expected == open_run(tmp_path / "run").unit(path, column)
    assert expected == unit(path, column)


def test_texts_that_are_read_back_are_of_fixed_size(tmp_path):
    """HDF5 keeps those of any length in a heap without a checksum, and may hang on a turned bit."""
    writer, _ = invented_run(tmp_path / "run")
    writer.finish(FINISHED, ANSWERS)
    with h5py.File(tmp_path / "run" / "run.h5") as master:
        texts = [(master, entry.name) for entry in HEADER if entry.is_text]
        texts += [(master["outcome"], entry.name) for entry in OUTCOME if entry.is_text]
        for place, name in texts:
            assert h5py.check_string_dtype(place.attrs.get_id(name).dtype).length is not None, name
