"""What has become of a run, told from its folder: it goes on, it ended, or it was cut off."""

from __future__ import annotations

import os
import subprocess
import sys
from dataclasses import asdict, replace
from json import dumps
from pathlib import Path

import pytest
from invented_run import ANSWERS, FINISHED, invented_header

from driftwell.record.condition import condition_of, holds_run
from driftwell.record.heartbeat import PROGRESS_FILE, Heartbeat, Sign, read_sign
from driftwell.record.outcome import Outcome
from driftwell.record.writer import RunWriter
from tests.record.test_heartbeat import Reached

NOW = 1.8e9
STOPPED = Outcome("stopped", "Asked to stop; the record up to t = 1 s is kept.", 4, 1.5, 2000)


@pytest.fixture
def sign(tmp_path: Path) -> Sign:
    """A sign of life that this very process gave just now; its run's folder is `tmp_path`."""
    Heartbeat(tmp_path, day=lambda: NOW).beats(Reached(steps=3))
    found = read_sign(tmp_path)
    assert found is not None
    return found


def put(folder: Path, sign: Sign) -> None:
    (folder / PROGRESS_FILE).write_text(dumps(asdict(sign)))


def ended_process() -> int:
    """The number of a process that is there no more."""
    process = subprocess.Popen([sys.executable, "-c", ""])
    process.wait()
    return process.pid


def test_a_run_whose_process_is_there_goes_on(tmp_path: Path, sign: Sign) -> None:
    found = condition_of(tmp_path, lambda: NOW + 5.0)
    assert ("going on", "going on", "", 5.0) == (found.state, found.word, found.note, found.age)
    assert sign == found.sign
    assert not found.over


def test_a_run_that_ended_says_how(tmp_path: Path) -> None:
    for word, note in (("finished", ""), ("failed", "It ran away."), ("stopped", "It ran away.")):
        Heartbeat(tmp_path).ends(Reached(), word, "It ran away.")
        found = condition_of(tmp_path)
        assert ("ended", word, note, True) == (found.state, found.word, found.note, found.over)


def test_a_run_whose_process_is_gone_was_cut_off_and_what_to_do_is_said(
    tmp_path: Path, sign: Sign
) -> None:
    put(tmp_path, replace(sign, process=ended_process()))
    found = condition_of(tmp_path, lambda: NOW)
    assert ("cut off", True) == (found.state, found.over)
    assert "its process is gone" in found.note
    assert "Give the same command again: it goes on from there" in found.note


def test_another_process_with_the_number_of_the_runs_is_not_taken_for_it(
    tmp_path: Path, sign: Sign
) -> None:
    boot, began = sign.mark.split()
    put(tmp_path, replace(sign, mark=f"{boot} {int(began) - 1}"))
    assert "cut off" == condition_of(tmp_path, lambda: NOW).state


def test_of_another_machine_only_the_age_of_the_sign_tells(tmp_path: Path, sign: Sign) -> None:
    """A minute at the least, and ten times the longest gap there was."""
    far = replace(sign, host="elsewhere", process=ended_process(), gap=2.0)
    for gap, age, state in (
        (2.0, 50.0, "going on"),
        (2.0, 70.0, "cut off"),
        (30.0, 290.0, "going on"),
        (30.0, 310.0, "cut off"),
    ):
        put(tmp_path, replace(far, gap=gap))
        found = condition_of(tmp_path, lambda age=age: NOW + age)
        assert state == found.state
    assert "no sign of it from elsewhere for 5 min" in found.note


def test_a_machine_started_anew_is_another_machine(tmp_path: Path, sign: Sign) -> None:
    put(tmp_path, replace(sign, mark="another-start 12345"))
    assert "going on" == condition_of(tmp_path, lambda: NOW + 1.0).state
    assert "cut off" == condition_of(tmp_path, lambda: NOW + 1000.0).state


def test_a_process_that_is_there_and_says_nothing_is_called_silent(
    tmp_path: Path, sign: Sign
) -> None:
    found = condition_of(tmp_path, lambda: NOW + 600.0)
    assert ("silent", False) == (found.state, found.over)
    assert f"its process {os.getpid()} is there, but has given no sign for 10 min" in found.note


def test_a_clock_set_back_makes_no_run_old(tmp_path: Path, sign: Sign) -> None:
    for state, host in (("going on", sign.host), ("going on", "elsewhere")):
        put(tmp_path, replace(sign, host=host))
        found = condition_of(tmp_path, lambda: NOW - 1e7)
        assert (state, 0.0) == (found.state, found.age)


def test_without_a_system_that_marks_processes_the_number_must_do(
    tmp_path: Path, sign: Sign, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr("driftwell.record.condition.process_mark", lambda process: "")
    put(tmp_path, replace(sign, mark=""))
    assert "going on" == condition_of(tmp_path, lambda: NOW).state
    put(tmp_path, replace(sign, mark="", process=ended_process()))
    assert "cut off" == condition_of(tmp_path, lambda: NOW).state
    put(tmp_path, replace(sign, mark="", process=10**30))
    assert "going on" == condition_of(tmp_path, lambda: NOW).state


@pytest.fixture
def recorded(tmp_path: Path) -> RunWriter:
    """A run that is begun, and of which nothing is sealed."""
    return RunWriter.create(tmp_path, invented_header())


def test_the_record_tells_the_ending_where_the_sign_does_not(
    tmp_path: Path, recorded: RunWriter, sign: Sign
) -> None:
    recorded.finish(STOPPED, ANSWERS)
    for text in (None, "damaged", dumps(asdict(replace(sign, process=ended_process())))):
        (tmp_path / PROGRESS_FILE).unlink(missing_ok=True)
        if text is not None:
            (tmp_path / PROGRESS_FILE).write_text(text)
        found = condition_of(tmp_path, lambda: NOW)
        assert ("ended", "stopped", STOPPED.sentence) == (found.state, found.word, found.note)


def test_a_run_taken_up_again_goes_on_whatever_its_old_answers_say(
    tmp_path: Path, recorded: RunWriter, sign: Sign
) -> None:
    recorded.finish(STOPPED, ANSWERS)
    assert "going on" == condition_of(tmp_path, lambda: NOW).state


def test_a_run_without_sign_or_answers_is_begun_or_unknown(
    tmp_path: Path, recorded: RunWriter
) -> None:
    assert "begun" == condition_of(tmp_path).state
    (tmp_path / PROGRESS_FILE).write_text("damaged")
    found = condition_of(tmp_path)
    assert "unknown" == found.state
    assert "progress.json: damaged, or not written by a run" in found.note


def test_damaged_answers_are_told_in_words(tmp_path: Path, recorded: RunWriter) -> None:
    recorded.finish(FINISHED, ANSWERS)
    (tmp_path / "answers.h5").write_bytes(b"nothing")
    found = condition_of(tmp_path)
    assert "unknown" == found.state
    assert "answers.h5: damaged or not readable" in found.note


def test_what_holds_a_run_is_seen(tmp_path: Path) -> None:
    assert not holds_run(tmp_path)
    assert not holds_run(tmp_path / "missing")
    for k, name in enumerate(("run.h5", PROGRESS_FILE, "segments")):
        folder = tmp_path / str(k)
        folder.mkdir()
        (folder / name).mkdir() if name == "segments" else (folder / name).write_text("")
        assert holds_run(folder)
