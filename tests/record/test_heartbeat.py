"""The sign of life of a run: written now and then, whole, and never to the run's harm."""

from __future__ import annotations

import json
import math
import os
import re
import subprocess
import sys
import time
from dataclasses import dataclass, fields, replace
from pathlib import Path

import pytest

from driftwell.errors import RecordError
from driftwell.record.heartbeat import (
    EVERY,
    PROGRESS_FILE,
    Heartbeat,
    Sign,
    process_mark,
    read_sign,
)


@dataclass(frozen=True, slots=True)
class Reached:
    """How far an invented run is."""

    time: float = 0.0
    duration: float = 2e-4
    steps: int = 0
    all_steps: int = 1000
    alive: int = 390
    born: int = 400
    energy_residual: float = -2e-5


class Clocks:
    """Two clocks that go only where they are told to."""

    def __init__(self) -> None:
        self.forward, self.day = 50.0, 1.7e9


@pytest.fixture
def clocks() -> Clocks:
    return Clocks()


@pytest.fixture
def heart(tmp_path: Path, clocks: Clocks) -> Heartbeat:
    return Heartbeat(tmp_path, lambda: clocks.forward, lambda: clocks.day)


def test_it_says_how_far_the_run_is_and_who_carries_it_out(
    tmp_path: Path, heart: Heartbeat, clocks: Clocks
) -> None:
    heart.beats(Reached())
    clocks.forward += 10.0
    clocks.day += 10.0
    heart.beats(Reached(time=5e-5, steps=250))
    sign = read_sign(tmp_path)
    assert sign is not None
    assert (5e-5, 2e-4, 250, 1000) == (sign.time, sign.duration, sign.steps, sign.all_steps)
    assert (390, 400, -2e-5) == (sign.alive, sign.born, sign.energy_residual)
    assert ("", "", os.getpid()) == (sign.outcome, sign.sentence, sign.process)
    assert (1.7e9, 1.7e9 + 10.0) == (sign.start, sign.stamp)
    assert (10.0, 10.0, 30.0) == (sign.stepping, sign.gap, sign.left)
    assert process_mark(os.getpid()) == sign.mark


def test_every_key_of_the_file_stands_on_the_page_of_the_format() -> None:
    page = (Path(__file__).resolve().parents[2] / "docs" / "record-format.md").read_text()
    table = page.partition("## Progress")[2]
    keys = re.findall(r"`(\w+)`", "".join(re.findall(r"^\|([^|]*)\|", table, re.MULTILINE)))
    assert {each.name for each in fields(Sign)} == set(keys)


def test_it_beats_at_once_and_then_every_other_second(
    tmp_path: Path, heart: Heartbeat, clocks: Clocks
) -> None:
    written = []
    for tenth in range(61):
        clocks.forward = 50.0 + tenth / 10.0
        heart.beats(Reached(steps=tenth))
        sign = read_sign(tmp_path)
        assert sign is not None
        written.append(sign.steps)
    assert EVERY == 2.0
    assert {0, 20, 40, 60} == set(written)


def test_the_end_is_written_at_once(tmp_path: Path, heart: Heartbeat, clocks: Clocks) -> None:
    heart.beats(Reached())
    clocks.forward += 0.1
    heart.ends(Reached(time=2e-4, steps=1000), "finished", "Größe erreicht.")
    sign = read_sign(tmp_path)
    assert sign is not None
    assert ("finished", "Größe erreicht.", 0.0) == (sign.outcome, sign.sentence, sign.left)
    assert 1000 == sign.steps
    assert [PROGRESS_FILE] == [file.name for file in tmp_path.iterdir()]


def test_a_run_that_is_taken_up_again_foretells_its_end_by_its_own_pace(
    tmp_path: Path, heart: Heartbeat, clocks: Clocks
) -> None:
    """900 steps were done before; 10 in 5 s leave 90, which take 45 s."""
    heart.beats(Reached(steps=900))
    clocks.forward += 5.0
    heart.beats(Reached(steps=910))
    sign = read_sign(tmp_path)
    assert sign is not None
    assert 45.0 == sign.left


def test_a_clock_set_back_changes_no_wait_and_no_length_of_time(
    tmp_path: Path, heart: Heartbeat, clocks: Clocks
) -> None:
    heart.beats(Reached())
    clocks.day -= 1e6
    clocks.forward += 3.0
    heart.beats(Reached(steps=100))
    sign = read_sign(tmp_path)
    assert sign is not None
    assert (3.0, 27.0, 1.7e9 - 1e6) == (sign.stepping, sign.left, sign.stamp)


@pytest.mark.parametrize("residual", [math.nan, math.inf, -math.inf])
def test_a_residual_that_is_no_number_leaves_a_file_of_plain_json(
    residual: float, tmp_path: Path, heart: Heartbeat
) -> None:
    heart.beats(Reached(energy_residual=residual))

    def refuse(word: str) -> None:
        raise ValueError(word)

    json.loads((tmp_path / PROGRESS_FILE).read_text(), parse_constant=refuse)
    sign = read_sign(tmp_path)
    assert sign is not None
    assert sign.energy_residual is None


def test_what_cannot_be_written_harms_nothing(tmp_path: Path, clocks: Clocks) -> None:
    """A folder that is gone, one that is a file, and a file that cannot be replaced."""
    (tmp_path / "file").write_text("")
    (tmp_path / "taken" / PROGRESS_FILE / "inside").mkdir(parents=True)
    for name in ("gone", "file", "taken", "\0"):
        heart = Heartbeat(tmp_path / name, lambda: clocks.forward)
        heart.beats(Reached())
        heart.ends(Reached(), "finished", "")
    assert {"file", "taken"} == {each.name for each in tmp_path.iterdir()}
    assert [PROGRESS_FILE] == [each.name for each in (tmp_path / "taken").iterdir()]


def test_a_full_disk_leaves_the_sign_before_and_nothing_half_written(tmp_path: Path) -> None:
    """A limit on the size of files stands for the full disk."""
    script = """
import resource, signal, sys
from pathlib import Path
from driftwell.record.heartbeat import Heartbeat
sys.path.insert(0, sys.argv[2])
from tests.record.test_heartbeat import Reached
heart = Heartbeat(Path(sys.argv[1]))
heart.beats(Reached(steps=7))
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (100, 100))
heart.ends(Reached(steps=8), "finished", "")
"""
    root = Path(__file__).resolve().parents[2]
    subprocess.run([sys.executable, "-c", script, tmp_path, root], check=True, timeout=60)
    sign = read_sign(tmp_path)
    assert sign is not None
    assert 7 == sign.steps
    assert [PROGRESS_FILE] == [file.name for file in tmp_path.iterdir()]


def test_where_nothing_is_written_there_is_no_sign(tmp_path: Path) -> None:
    assert read_sign(tmp_path) is None
    assert read_sign(tmp_path / "missing") is None


@pytest.mark.parametrize(
    "content",
    [b"", b"{", b"[1]", b"{}", b"\xff\xfe", b"[" * 90_000, b'{"time": 1}', b"null", b"1" * 10_000],
)
def test_a_file_that_is_no_sign_is_told_in_words(content: bytes, tmp_path: Path) -> None:
    (tmp_path / PROGRESS_FILE).write_bytes(content)
    with pytest.raises(RecordError) as told:
        read_sign(tmp_path)
    assert str(told.value).startswith(f"{tmp_path / PROGRESS_FILE}: damaged, or not written by")


def test_a_sign_cut_anywhere_or_of_wrong_types_is_told_in_words(
    tmp_path: Path, heart: Heartbeat
) -> None:
    heart.beats(Reached())
    path = tmp_path / PROGRESS_FILE
    whole = path.read_text()
    for length in range(0, len(whole) - 2, 7):
        path.write_text(whole[:length])
        with pytest.raises(RecordError, match="damaged"):
            read_sign(tmp_path)
    for name, value in json.loads(whole).items():
        wrong = 3 if isinstance(value, str) else "three"
        path.write_text(json.dumps({**json.loads(whole), name: wrong}))
        with pytest.raises(RecordError, match="damaged"):
            read_sign(tmp_path)


def test_a_sign_of_a_later_version_is_read_as_far_as_it_is_known(
    tmp_path: Path, heart: Heartbeat
) -> None:
    heart.beats(Reached(steps=5))
    path = tmp_path / PROGRESS_FILE
    path.write_text(json.dumps({**json.loads(path.read_text()), "weather": "fine"}))
    sign = read_sign(tmp_path)
    assert sign is not None
    assert 5 == sign.steps
    assert replace(sign, steps=6) != sign


def test_a_process_that_has_ended_has_no_mark_even_while_its_number_is_kept() -> None:
    """It is kept for the parent until that asks how the process ended."""
    process = subprocess.Popen([sys.executable, "-c", "input()"], stdin=subprocess.PIPE)
    mark = process_mark(process.pid)
    assert mark
    assert process_mark(os.getpid()) != mark
    assert process.stdin is not None
    process.kill()
    began = time.monotonic()
    while process_mark(process.pid):
        assert time.monotonic() - began < 30.0
    process.stdin.close()
    process.wait()
    assert "" == process_mark(process.pid)
