"""Signals: the first lets a run end in order, the second ends it at once, what is kept is told."""

from __future__ import annotations

import re
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path

import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.record.master import MASTER
from tests.cli.small_runs import LONG, scenario, settings, started

PATIENCE = 240.0
"""s, for a first compilation on a busy machine."""


@contextmanager
def long_run(folder: Path, *texts: str) -> Iterator[subprocess.Popen[str]]:
    """A run that would take hours, once it has something to keep; killed in the end."""
    arguments = ("run", scenario(folder), "-o", folder / "run", "--no-pictures")
    process = started(*arguments, *settings(*LONG, *texts))
    try:
        wait_for(process, folder / "run" / MASTER)
        time.sleep(1.0)
        yield process
    finally:
        process.kill()
        process.communicate()


def wait_for(process: subprocess.Popen[str], path: Path) -> None:
    """Until the file is there."""
    end = time.monotonic() + PATIENCE
    while not path.exists():
        assert process.poll() is None, process.communicate()[1]
        assert time.monotonic() < end, f"{path} is not there"
        time.sleep(0.02)


@pytest.mark.parametrize("number", [signal.SIGINT, signal.SIGTERM, signal.SIGHUP])
def test_a_signal_stops_the_run_in_order_and_the_record_is_kept(
    number: signal.Signals, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    with long_run(tmp_path) as process:
        process.send_signal(number)
        out, err = process.communicate(timeout=60)
    assert 4 == process.returncode, err
    assert "Stopping after the steps under way; once more to end at once." in err
    assert "Traceback" not in err
    told = re.search(
        r"stopped: Asked to stop; recorded up to t = (.*), and the same command goes on\.", out
    )
    assert told is not None
    assert "held    1.000 ± 0.056" in out
    found = open_run(tmp_path / "run")
    assert ("stopped", 4) == (found.outcome.word, found.outcome.exit_code)
    times, states = found.trajectory
    assert found.end_time == times[-1] > 0.0
    assert (len(times), 8, 6) == states.shape
    assert found.end_time == found.snapshots[-1]
    assert [] == found.damage(thorough=True)
    assert 0 == main(["info", str(tmp_path / "run")])
    shown = capsys.readouterr().out.splitlines()
    assert told[0] == shown[1]
    assert f"reached {told[1]} of 1 ks" == shown[2]


def test_a_second_signal_ends_at_once_and_what_was_sealed_is_kept(tmp_path: Path) -> None:
    """While steps take so long that the first one cannot be heeded yet."""
    with long_run(tmp_path, "cloud.load.count=60000", "record.tracks=0") as process:
        process.send_signal(signal.SIGINT)
        assert process.stderr is not None
        while not process.stderr.readline().startswith("Stopping after the steps under way"):
            pass
        process.send_signal(signal.SIGINT)
        _, err = process.communicate(timeout=60)
    assert 130 == process.returncode
    assert "\nEnded at once; what was sealed before is kept.\n" == err
    assert "Traceback" not in err
    assert "unfinished" == open_run(tmp_path / "run").outcome.word


def test_a_signal_before_the_first_step_ends_at_once_and_leaves_no_folder(tmp_path: Path) -> None:
    """Compiling, with an empty cache, takes long enough to be interrupted."""
    arguments = ("run", scenario(tmp_path), "-o", tmp_path / "run")
    process = started(*arguments, DRIFTWELL_CACHE=str(tmp_path / "cache"))
    assert process.stderr is not None
    told = [process.stderr.readline(), process.stderr.readline()]
    assert told[-1].startswith("compiling for this machine, once for each version")
    process.send_signal(signal.SIGINT)
    _, err = process.communicate(timeout=60)
    assert 130 == process.returncode
    assert "\nEnded before the first step; nothing is recorded.\n" == err
    assert not (tmp_path / "run").exists()


def test_a_signal_that_was_to_be_ignored_is_ignored(tmp_path: Path) -> None:
    """As after nohup, or in the background of a script."""
    code = (
        "import signal, sys\n"
        "signal.signal(signal.SIGHUP, signal.SIG_IGN)\n"
        "from driftwell.cli.main import main\n"
        "sys.exit(main(sys.argv[1:]))"
    )
    given = settings(*LONG)
    words = ["run", str(scenario(tmp_path)), "-o", str(tmp_path / "run"), "--no-pictures", *given]
    process = subprocess.Popen(
        [sys.executable, "-c", code, *words],
        stderr=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )
    try:
        wait_for(process, tmp_path / "run" / MASTER)
        process.send_signal(signal.SIGHUP)
        time.sleep(1.0)
        assert process.poll() is None
        process.send_signal(signal.SIGTERM)
        process.communicate(timeout=60)
        assert 4 == process.returncode
    finally:
        process.kill()
        process.communicate()


def test_a_run_goes_on_when_nobody_reads_what_it_says(tmp_path: Path) -> None:
    """The terminal was closed, or the reader of a pipe has left: only the talk is lost."""
    process = started("run", scenario(tmp_path), "-o", tmp_path / "run", "--no-pictures")
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    process.stderr.close()
    assert 0 == process.wait(timeout=PATIENCE)
    assert "finished" == open_run(tmp_path / "run").outcome.word


def test_signals_mean_what_they_meant_once_a_run_is_over(tmp_path: Path) -> None:
    before = [signal.getsignal(each) for each in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)]
    files = set(map(str, Path("/proc/self/fd").iterdir()))
    given = settings("duration=2 us")
    arguments = ["run", str(scenario(tmp_path)), "-o", str(tmp_path / "run"), "--no-pictures"]
    assert 0 == main([*arguments, *given])
    after = [signal.getsignal(each) for each in (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)]
    assert before == after
    assert files >= set(map(str, Path("/proc/self/fd").iterdir()))
