"""Kills, full disks and damaged files: what was sealed stays whole, what is wrong is named."""

from __future__ import annotations

import errno
import os
import re
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from invented_run import ANSWERS, FINISHED, Recorded, invented_header, invented_run, record_segment

from driftwell import open_run
from driftwell.errors import RecordError
from driftwell.record.commit import commit
from driftwell.record.layout import COUNTERS, ROWS
from driftwell.record.writer import RunWriter

CALLS = ("open", "write", "fsync", "replace", "rename", "unlink", "mkdir", "rmdir")
"""All ways in which the writer touches the disk."""


class Killed(BaseException):
    """The process is gone: nothing it would have done afterwards happens."""


def every_file(folder: Path) -> dict[str, bytes]:
    return {
        str(path.relative_to(folder)): path.read_bytes()
        for path in sorted(folder.rglob("*"))
        if path.is_file()
    }


def full_disk(*_: object) -> int:
    raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))


def assert_whole(folder: Path, recorded: Recorded, segments: int) -> None:
    """The run shows the first `segments` segments recorded, and nothing else."""
    run = open_run(folder)
    assert segments == len(run.segments)
    assert [] == run.damage(thorough=True)
    for entry in ROWS:
        expected = recorded.rows[entry.path][:segments]
        found = run.rows(entry.path)
        assert sum(len(rows) for rows in expected) == len(found), entry.path
        if expected:
            assert np.concatenate(expected).tobytes() == found.tobytes(), entry.path
    if segments:
        step = recorded.states[segments - 1]["schedule/step"]
        assert step == run.state()["schedule/step"]


class MortalDisk:
    """The disk until call number `last`, before which the process is killed.

    torn : a write that is the last call is half done first
    """

    def __init__(self, last: int, torn: bool) -> None:
        self.last = last
        self.torn = torn
        self.calls: list[str] = []
        self._real = {name: getattr(os, name) for name in CALLS}

    def __getitem__(self, name: str) -> Callable[..., Any]:
        def call(*arguments: Any, **options: Any) -> Any:
            self.calls.append(name)
            if len(self.calls) >= self.last:
                if self.torn and len(self.calls) == self.last:
                    self._real[name](arguments[0], arguments[1][: len(arguments[1]) // 2])
                raise Killed
            return self._real[name](*arguments, **options)

        return call


def test_a_run_killed_at_any_touch_of_the_disk_shows_all_it_sealed(tmp_path, monkeypatch):
    """Stopped before each single call in turn, and within each write."""
    counts = {counter: 2 + place for place, counter in enumerate(COUNTERS)}

    def killed_run(folder: Path, disk: MortalDisk) -> tuple[Recorded, int]:
        recorded, sealed = Recorded(), 0
        with monkeypatch.context() as patch, suppress(Killed):
            for name in CALLS:
                patch.setattr(os, name, disk[name])
            writer = RunWriter.create(folder, invented_header())
            for k in range(2):
                record_segment(writer, recorded, counts, (3,), float(k), 100 * k)
                sealed += 1
            writer.finish(FINISHED, ANSWERS)
        return recorded, sealed

    unbroken = MortalDisk(10**9, torn=False)
    assert 2 == killed_run(tmp_path / "unbroken", unbroken)[1]
    assert set(CALLS) - {"rename", "unlink", "rmdir"} == set(unbroken.calls)
    kills = [(k, False) for k in range(1, len(unbroken.calls) + 1)]
    kills += [(k, True) for k, name in enumerate(unbroken.calls, 1) if name == "write"]
    unborn, ahead = 0, set()
    for last, torn in kills:
        folder = tmp_path / f"{last}{'-torn' * torn}"
        recorded, sealed = killed_run(folder, MortalDisk(last, torn))
        if not (folder / "run.h5").exists():
            with pytest.raises(RecordError, match=r"no run found|before it sealed"):
                open_run(folder)
            unborn += 1
            continue
        # the last segment may be on the disk although the writer had not yet heard so
        found = len(open_run(folder).segments)
        ahead.add(found - sealed)
        assert_whole(folder, recorded, found)
        with h5py.File(folder / "run.h5") as master:
            assert counts["records"] * sealed <= len(master["trajectory/time"])
    assert {0, 1} == ahead
    assert unborn < len(kills) / 3


def test_a_file_half_written_by_a_killed_run_is_ignored(tmp_path):
    _, recorded = invented_run(tmp_path / "run", segments=2)
    half = (tmp_path / "run" / "segments" / "000002.h5").read_bytes()[:3000]
    (tmp_path / "run" / "segments" / "000003.h5.part").write_bytes(half)
    (tmp_path / "run" / "run.h5.part").write_bytes(half)
    for name in ("notes.h5", "7.h5", "000003.h5.bak"):
        (tmp_path / "run" / "segments" / name).write_bytes(b"somebody else's")
    assert_whole(tmp_path / "run", recorded, 2)


def test_a_segment_sealed_after_the_last_master_is_shown(tmp_path):
    writer, recorded = invented_run(tmp_path / "run", segments=1)
    master = (tmp_path / "run" / "run.h5").read_bytes()
    counts = dict.fromkeys(COUNTERS, 4)
    record_segment(writer, recorded, counts, (2,), 5.0, 999)
    (tmp_path / "run" / "run.h5").write_bytes(master)
    assert_whole(tmp_path / "run", recorded, 2)
    assert open_run(tmp_path / "run").snapshots[-1] == 5.0


def test_a_run_without_its_master_is_read_from_its_segments(tmp_path):
    _, recorded = invented_run(tmp_path / "run")
    (tmp_path / "run" / "run.h5").unlink()
    assert_whole(tmp_path / "run", recorded, 3)
    assert invented_header().title == open_run(tmp_path / "run").header.title


@pytest.mark.parametrize("call", ["write", "fsync", "open"])
def test_a_full_disk_says_what_is_kept_and_leaves_earlier_segments_alone(
    tmp_path, monkeypatch, call
):
    folder = tmp_path / "run"
    writer, recorded = invented_run(folder, segments=2)
    before = every_file(folder)
    counts = dict.fromkeys(COUNTERS, 4)
    with monkeypatch.context() as patch:
        patch.setattr(os, call, full_disk)
        with pytest.raises(RecordError) as caught:
            record_segment(writer, recorded, counts, (2,), 5.0, 999)
    text = str(caught.value)
    assert "000003.h5: No space left on device" in text
    assert re.search(r"Kept: 2 segments, whole up to t = 1\.\d+ s", text)
    assert before == every_file(folder)
    assert_whole(folder, recorded, 2)


def test_sealing_may_be_tried_again_once_there_is_space(tmp_path, monkeypatch):
    folder = tmp_path / "run"
    writer, _ = invented_run(folder, segments=1)
    writer.trajectory(7.0, np.full((3, 6), 42.0))
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", full_disk)
        with pytest.raises(RecordError):
            writer.seal({})
    writer.seal({})
    times, states = open_run(folder).trajectory
    assert (7.0, 42.0) == (times[-1], states[-1, 2, 5])


def test_a_full_disk_at_the_first_segment_says_that_nothing_is_kept(tmp_path, monkeypatch):
    writer = RunWriter.create(tmp_path / "run", invented_header())
    writer.trajectory(0.0, np.zeros((3, 6)))
    monkeypatch.setattr(os, "write", full_disk)
    with pytest.raises(RecordError, match="Kept: nothing yet"):
        writer.seal({})
    assert ["run.h5", "scenario.toml"] == sorted(every_file(tmp_path / "run"))


def test_a_rename_that_fails_leaves_the_segments_before_and_no_half_file(tmp_path, monkeypatch):
    folder = tmp_path / "run"
    writer, recorded = invented_run(folder, segments=2)
    before = every_file(folder)
    monkeypatch.setattr(os, "replace", full_disk)
    with pytest.raises(RecordError, match="Kept: 2 segments"):
        writer.seal({})
    assert before == every_file(folder)
    assert_whole(folder, recorded, 2)


def test_a_segment_is_kept_even_if_the_master_cannot_be_replaced(tmp_path, monkeypatch):
    folder = tmp_path / "run"
    writer, recorded = invented_run(folder, segments=2)
    master = (folder / "run.h5").read_bytes()
    real = os.replace

    def full_for_the_master(source, target):
        return full_disk() if Path(target).name == "run.h5" else real(source, target)

    counts = dict.fromkeys(COUNTERS, 4)
    with monkeypatch.context() as patch:
        patch.setattr(os, "replace", full_for_the_master)
        with pytest.raises(RecordError, match="Kept: 3 segments"):
            record_segment(writer, recorded, counts, (), 5.0, 998)
    assert master == (folder / "run.h5").read_bytes()
    assert 3 == len(open_run(folder).segments)
    writer.seal({})
    assert 4 == len(open_run(folder).segments)
    with h5py.File(folder / "run.h5") as file:
        assert open_run(folder).ledger.tobytes() == file["ledger"][()].tobytes()


def test_a_run_that_cannot_begin_leaves_the_folder_free(tmp_path, monkeypatch):
    with monkeypatch.context() as patch:
        patch.setattr(os, "write", full_disk)
        with pytest.raises(RecordError, match="cannot be written"):
            RunWriter.create(tmp_path / "run", invented_header())
    assert {} == every_file(tmp_path / "run")
    RunWriter.create(tmp_path / "run", invented_header())


def test_short_writes_are_carried_on(tmp_path, monkeypatch):
    """A write may take fewer bytes than it was given."""
    real = os.write
    monkeypatch.setattr(os, "write", lambda handle, image: real(handle, image[:7]))
    commit(tmp_path / "file", b"some twenty bytes..." * 3)
    assert b"some twenty bytes..." * 3 == (tmp_path / "file").read_bytes()


def test_a_damaged_number_is_noticed_and_the_file_named(tmp_path):
    """One bit of a trajectory turned over: its checksum does not fit; the rest is readable."""
    folder = tmp_path / "run"
    writer = RunWriter.create(folder, invented_header(tracked=300))
    recorded = Recorded()
    for k in range(2):
        record_segment(writer, recorded, dict.fromkeys(COUNTERS, 50), (), float(k), 10 * k)
    path = folder / "segments" / "000002.h5"
    image = bytearray(path.read_bytes())
    place = image.index(recorded.rows["trajectory/state"][1][3, 4].tobytes())
    image[place + 5] ^= 16
    path.write_bytes(image)
    run = open_run(folder)
    with pytest.raises(RecordError, match=r"000002\.h5: damaged"):
        _ = run.trajectory
    assert recorded.all_rows("ledger").tobytes() == run.ledger.tobytes()
    assert [] == run.damage()
    assert 1 == len(run.damage(thorough=True))
    assert "000002.h5: damaged" in run.damage(thorough=True)[0]


def test_no_turned_bit_goes_unnoticed(tmp_path):
    """Whatever byte of a segment is spoiled, numbers read are right or the file is named."""
    folder = tmp_path / "run"
    invented_run(folder, segments=1)
    path = folder / "segments" / "000001.h5"
    image = path.read_bytes()
    whole = open_run(folder)
    expected = {entry.path: whole.rows(entry.path).tobytes() for entry in ROWS}
    noticed = 0
    for place in range(0, len(image), len(image) // 150):
        spoiled = bytearray(image)
        spoiled[place] ^= 64
        path.write_bytes(spoiled)
        run = open_run(folder)
        assert 1 == len(run.damage(thorough=True))
        for entry in ROWS:
            try:
                found = run.rows(entry.path).tobytes()
            except RecordError as fault:
                assert str(path) in str(fault)  # noqa: PT017
                noticed += 1
            else:
                assert expected[entry.path] == found, (place, entry.path)
    assert noticed > 20


@pytest.mark.parametrize("fault", ["missing", "cut off", "longer", "not HDF5"])
def test_a_missing_or_cut_segment_is_named(tmp_path, fault):
    folder = tmp_path / "run"
    _, recorded = invented_run(folder)
    path = folder / "segments" / "000002.h5"
    image = path.read_bytes()
    if fault == "missing":
        path.unlink()
    else:
        spoiled = {
            "cut off": image[: len(image) // 2],
            "longer": image + b"0",
            "not HDF5": bytes(len(image)),
        }
        path.write_bytes(spoiled[fault])
    run = open_run(folder)
    with pytest.raises(RecordError, match=r"000002\.h5: (missing|damaged)"):
        _ = run.ledger
    assert 1 == len(run.damage())
    assert "000002.h5" in run.damage()[0]
    time, particles = recorded.snapshots[2]
    assert particles.id.tolist() == run.snapshot(time).id.tolist()


def test_a_gap_before_an_unlisted_segment_is_named(tmp_path):
    folder = tmp_path / "run"
    invented_run(folder)
    (folder / "run.h5").unlink()
    (folder / "segments" / "000002.h5").unlink()
    with pytest.raises(RecordError, match=r"000002\.h5: missing"):
        open_run(folder)


def test_a_damaged_master_is_named_and_can_be_done_without(tmp_path):
    folder = tmp_path / "run"
    _, recorded = invented_run(folder)
    (folder / "run.h5").write_bytes(b"not HDF5 at all")
    with pytest.raises(RecordError, match=r"run\.h5: damaged .* Move it away"):
        open_run(folder)
    (folder / "run.h5").rename(folder / "moved-away.h5")
    assert_whole(folder, recorded, 3)


def test_a_damaged_scenario_is_noticed(tmp_path):
    folder = tmp_path / "run"
    RunWriter.create(folder, invented_header())
    image = (folder / "run.h5").read_bytes()
    assert b"3 \xc2\xb5m\n" in image
    (folder / "run.h5").write_bytes(image.replace(b"3 \xc2\xb5m\n", b"4 \xc2\xb5m\n"))
    with pytest.raises(RecordError, match=r"run\.h5: damaged .*checksum"):
        open_run(folder)
    (folder / "run.h5").write_bytes(image)
    with h5py.File(folder / "run.h5", "r+") as file:
        file.attrs["scenario"] = "another"
    with pytest.raises(RecordError, match=r"run\.h5: damaged; the scenario"):
        open_run(folder)
