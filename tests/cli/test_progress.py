"""What a run shows while it goes on, to a person at a terminal and to a log."""

from __future__ import annotations

import os
import pty
import re
import subprocess
import sys
import termios
from collections.abc import Callable
from contextlib import suppress
from datetime import datetime, timedelta
from pathlib import Path

import numpy as np
import pytest

from driftwell.cli.runs import progress as module
from driftwell.cli.runs.progress import ProgressDisplay, told
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.coulomb.form import Coulomb
from driftwell.particles.state import Particles
from driftwell.run import Progress
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice
from tests.cli.small_runs import scenario, settings

Printed = pytest.CaptureFixture[str]
THIRD = Progress(6.8e-5, 2e-4, 390, 400, 7480, 22000, -6.7e-4)


@pytest.fixture
def clock(monkeypatch: pytest.MonkeyPatch) -> Callable[[float], None]:
    """A clock that goes only where it is told to, from 0 on."""
    now = [100.0]
    monkeypatch.setattr(module.time, "monotonic", lambda: now[0])

    def goes_to(seconds: float) -> None:
        now[0] = 100.0 + seconds

    return goes_to


DIRECT, OFF, TREE = (Coulomb(method=method) for method in ("direct", "off", "tree"))


def display(wanted: bool = False, coulomb: Coulomb = DIRECT) -> ProgressDisplay:
    wish = StopWish(lambda: True)
    wish.wanted = wanted
    return ProgressDisplay(wish, 2, coulomb)


def particles(count: int) -> Particles:
    three, one, index = np.zeros((3, count)), np.ones(count), np.arange(count)
    return Particles(three, three, one, one, one, index, index, index, one)


def plan(steps: int) -> Schedule:
    return Schedule(np.array([0.0, 1.0]), np.array([0, 0]), np.array([steps]))


def test_how_far_a_run_is_is_told_in_readable_units() -> None:
    assert (
        "t = 68 us of 200 us, 390 of 400 charges left, energy residual -6.7e-04, done "
        == told(THIRD, 10.0)[:-8]
    )
    assert "68 us of 200 us, 390/400 left, residual 7e-04, done " == told(THIRD, 10.0, True)[:-8]


@pytest.mark.parametrize(
    ("elapsed", "rest", "pattern"),
    [
        (34.0, 66.0, "%H:%M:%S"),
        (34 * 3600.0, 66 * 3600.0, "%a %H:%M"),
        (34 * 86400.0, 66 * 86400.0, "%Y-%m-%d"),
    ],
)
def test_the_end_is_foretold_at_the_present_pace(elapsed: float, rest: float, pattern: str) -> None:
    """By its time, its day and time, or its date, as far off as it is."""
    before = datetime.now()
    found = told(THIRD, elapsed).partition(", done ")[2]
    ends = {f"{before + timedelta(seconds=rest + late):{pattern}}" for late in (0, 1, 2)}
    assert found in ends


def test_nothing_is_foretold_before_the_first_step_or_beyond_the_calendar() -> None:
    assert "done" not in told(Progress(0.0, 1.0, 8, 8, 0, 100, 0.0), 1.0)
    endless = Progress(1e-9, 1.0, 8, 8, 1, 10**13, 0.0)
    assert told(endless, 1e4).endswith("done in no time that can be told")


def test_a_log_gets_a_line_now_and_then(clock: Callable[[float], None], capsys: Printed) -> None:
    """First after five seconds, then after ever longer waits."""
    shown = display()
    lines = []
    for second in range(100):
        clock(float(second))
        assert shown.goes_on(THIRD)
        if capsys.readouterr().err:
            lines.append(second)
    assert [5, 15, 45] == lines


def test_a_line_of_a_log_begins_with_the_time(
    clock: Callable[[float], None], capsys: Printed
) -> None:
    shown = display()
    shown.goes_on(THIRD)
    clock(6.0)
    shown.goes_on(THIRD)
    assert re.fullmatch(r"\d\d:\d\d:\d\d  t = 68 us of 200 us, .*\n", capsys.readouterr().err)


def test_a_wish_to_stop_is_passed_on() -> None:
    assert display(wanted=False).goes_on(THIRD)
    assert not display(wanted=True).goes_on(THIRD)


def test_what_will_be_done_is_told_first(capsys: Printed) -> None:
    display().begins(StepChoice(9.0909e-9, "the drive"), plan(22000), particles(1))
    assert "1 charge, 22000 steps of at most 9.091 ns: the drive\n" == capsys.readouterr().err


@pytest.mark.parametrize(
    ("count", "steps", "words"),
    [(100_000, 10_000, "6.9 hours"), (1_000_000, 10_000, "29 days"), (10**7, 10**6, "790 years")],
)
def test_a_sum_without_end_is_told_before_it_begins(
    count: int, steps: int, words: str, capsys: Printed
) -> None:
    display().begins(StepChoice(1e-9, "the drive"), plan(steps), particles(count))
    assert f"take at least {words}." in capsys.readouterr().err
    for shorter in (TREE, OFF):
        display(coulomb=shorter).begins(
            StepChoice(1e-9, "the drive"), plan(steps), particles(count)
        )
        assert f"take at least {words}." not in capsys.readouterr().err


def test_what_is_to_be_known_of_the_coulomb_sum_is_told_on_a_line_of_its_own(
    clock: Callable[[float], None], capsys: Printed
) -> None:
    display().told("Coulomb sum: direct; the scenario says so")
    assert "Coulomb sum: direct; the scenario says so\n" == capsys.readouterr().err


def at_a_terminal(columns: int, arguments: list[str]) -> tuple[int, str]:
    """Exit code of the command and all it writes to a terminal of so many columns."""
    ours, theirs = pty.openpty()
    termios.tcsetwinsize(theirs, (40, columns))
    process = subprocess.Popen(
        [sys.executable, "-m", "driftwell", *arguments],
        stdin=theirs,
        stdout=theirs,
        stderr=theirs,
        env={**os.environ, "PYTHONIOENCODING": "utf-8"},
    )
    os.close(theirs)
    written = b""
    with suppress(OSError):  # the other side has closed it
        while some := os.read(ours, 65536):
            written += some
    os.close(ours)
    return process.wait(timeout=60), written.decode()


@pytest.mark.parametrize("columns", [90, 0])
def test_a_terminal_shows_a_bar_that_is_gone_in_the_end(columns: int, tmp_path: Path) -> None:
    """As wide as the terminal, or as a usual one where it does not say how wide it is."""
    path = scenario(tmp_path)
    given = settings("duration=400 ms", "stepping.step=100 ns", "record.every=4 ms")
    arguments = ["run", str(path), "-o", str(tmp_path / "run"), "--no-pictures", *given]
    code, written = at_a_terminal(columns, arguments)
    assert 0 == code, written
    frames = [part for part in written.replace("\n", "\r").split("\r") if "|" in part]
    assert len(frames) >= 2
    assert frames[0].startswith("  0 %|")
    assert re.search(
        r"\| [\d.]+ ms of 400 ms, 8/8 left, residual \de-\d\d, done \d\d:\d\d:\d\d$", frames[-1]
    )
    assert (columns or 80) == max(map(len, frames))
    gone, after = written.rpartition("|")[2].replace("\r\n", "\n").split("\r")[1:]
    assert gone.isspace()
    assert after.startswith("\nfinished: The motion was followed to t = 400 ms.\n")
    assert 1 == written.count("finished:")
