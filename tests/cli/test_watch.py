"""`driftwell watch`: how far runs are, on a terminal while they go on, or once as text."""

from __future__ import annotations

import json
import os
import pty
import re
import select
import signal
import subprocess
import sys
import termios
import time
from contextlib import suppress
from dataclasses import asdict, replace
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.cli.runs import watch as module
from driftwell.cli.runs.watch_table import Row, cells, counts, fitted, table
from driftwell.record.condition import Condition
from driftwell.record.heartbeat import PROGRESS_FILE, Heartbeat, Sign, read_sign
from driftwell.run import Progress
from tests.cli.small_runs import LONG, scenario, settings, started

Printed = pytest.CaptureFixture[str]
THIRD = Progress(6.8e-5, 2e-4, 390, 400, 7480, 22000, -6.7e-4)


def run_folder(folder: Path, outcome: str = "", sentence: str = "It ended.") -> Path:
    """A run's folder with a sign of life that this process gave just now."""
    folder.mkdir(parents=True)
    heart = Heartbeat(folder)
    if outcome:
        heart.ends(THIRD, outcome, sentence)
    else:
        heart.beats(THIRD)
    return folder


def change(folder: Path, **values: object) -> None:
    """Put other values into the sign of life of a run."""
    sign = read_sign(folder)
    assert sign is not None
    (folder / PROGRESS_FILE).write_text(json.dumps({**asdict(sign), **values}))


@pytest.fixture
def sweep(tmp_path: Path) -> Path:
    """A sweep's folder: two runs finished, one failed, one going on, one cut off."""
    runs = tmp_path / "sweep" / "runs"
    for name, outcome in (("aa", "finished"), ("bb", "finished"), ("cc", "failed")):
        run_folder(runs / name, outcome, "The motion could not be continued.")
    run_folder(runs / "dd")
    change(run_folder(runs / "ee"), mark="another 1", stamp=0.0)
    return tmp_path / "sweep"


def test_a_run_is_shown_once_where_no_terminal_is(tmp_path: Path, capsys: Printed) -> None:
    folder = run_folder(tmp_path / "trap")
    assert 0 == main(["watch", str(folder)])
    printed = capsys.readouterr()
    assert "" == printed.err
    head, row = printed.out.splitlines()
    assert ["run", "state", "done", "reached", "charges", "residual"] == head.split()
    assert row.startswith("trap  going on  [######..............] 34.0 %  68 us of 200 us  390/400")
    assert row.endswith("-7e-04")


def test_the_end_is_foretold_by_the_clock(tmp_path: Path, capsys: Printed) -> None:
    change(run_folder(tmp_path / "trap"), left=3600.0)
    before = time.time()
    assert 0 == main(["watch", str(tmp_path / "trap")])
    ends = {
        time.strftime("%H:%M:%S", time.localtime(before + 3600.0 + late)) for late in (-1, 0, 1, 2)
    }
    assert capsys.readouterr().out.split()[-1] in ends


def test_a_sweep_is_counted_and_the_urgent_runs_come_first(sweep: Path, capsys: Printed) -> None:
    assert 0 == main(["watch", str(sweep), "--once"])
    lines = capsys.readouterr().out.splitlines()
    assert lines[0].startswith("5 runs: 2 finished, 1 going on, 1 cut off, 1 failed  (sweep /")
    assert ["run", "dd", "ee", "cc", "aa", "bb"] == [line.split()[0] for line in lines[1:7]]
    rest = " ".join(" ".join(lines[7:]).split())
    assert "ee: cut off; its process is gone" in rest or "ee: cut off; no sign of it" in rest
    assert "Give the same command again: it goes on from there" in rest
    assert "cc: failed; The motion could not be continued." in rest


def test_damaged_and_missing_files_are_told_in_words(sweep: Path, capsys: Printed) -> None:
    (sweep / "runs" / "aa" / PROGRESS_FILE).write_bytes(b"\x00\xff")
    (sweep / "runs" / "bb" / PROGRESS_FILE).unlink()
    (sweep / "runs" / "not a run").write_text("")
    (sweep / "catalogue.sqlite").write_bytes(b"not a database")
    assert 0 == main(["watch", str(sweep)])
    printed = capsys.readouterr().out
    assert re.search("aa +unknown", printed)
    assert "progress.json: damaged, or not written by a run." in " ".join(printed.split())
    assert re.search("bb +begun", printed)
    assert "bb: begun; no sign of life yet" in printed
    assert "not a run" not in printed


def test_a_sweep_in_which_nothing_has_begun_says_so(tmp_path: Path, capsys: Printed) -> None:
    (tmp_path / "runs").mkdir()
    assert 0 == main(["watch", str(tmp_path)])
    assert f"sweep {tmp_path}: no run has begun yet\n" == capsys.readouterr().out


def test_what_holds_no_run_is_told_with_2(tmp_path: Path, capsys: Printed) -> None:
    (tmp_path / "file").write_text("")
    for name in (".", "missing", "file", "a\0b"):
        assert 2 == main(["watch", str(tmp_path / name)])
        printed = capsys.readouterr()
        assert "" == printed.out
        assert 1 == printed.err.count("\n")
        assert "Traceback" not in printed.err


def test_a_finished_run_needs_no_sign_of_life(tmp_path: Path, capsys: Printed) -> None:
    """As of an older version, or where the file could not be written."""
    arguments = ["run", str(scenario(tmp_path)), "-o", str(tmp_path / "run"), "--no-pictures"]
    assert 0 == main([*arguments, *settings("duration=2 us")])
    sign = read_sign(tmp_path / "run")
    assert sign is not None
    assert ("finished", 100, 100, 2e-6) == (sign.outcome, sign.steps, sign.all_steps, sign.time)
    (tmp_path / "run" / PROGRESS_FILE).unlink()
    capsys.readouterr()
    assert 0 == main(["watch", str(tmp_path / "run")])
    assert "finished" in capsys.readouterr().out


def row(name: str, word: str = "finished", note: str = "", sign: Sign | None = None) -> Row:
    states = {"finished": "ended", "failed": "ended"}
    return Row(name, Condition(states.get(word, word), word, note, sign, 0.0))  # type: ignore[arg-type]


@pytest.fixture
def sign(tmp_path: Path) -> Sign:
    found = read_sign(run_folder(tmp_path / "one"))
    assert found is not None
    return replace(found, left=100.0)


@pytest.mark.parametrize("columns", [20, 40, 60, 79, 100, 200])
def test_the_table_fits_the_width_and_gives_up_columns_one_by_one(columns: int, sign: Sign) -> None:
    rows = [row(f"run {k} of a long name {'雪' * k}", "going on", "", sign) for k in range(30)]
    lines = table(rows, "sweep x", columns, 1000)
    assert max(map(cells, lines)) <= columns
    assert 32 == len(lines)
    heads = lines[1].split()
    assert "run" == heads[0]
    assert ("residual" in heads) == (columns >= 79)
    assert ("reached" in heads) == (columns >= 100)


@pytest.mark.parametrize("lines", [1, 3, 5, 10, 24, 80])
@pytest.mark.parametrize("count", [1, 4, 50])
def test_the_table_fits_the_height_and_counts_what_is_not_shown(lines: int, count: int) -> None:
    rows = [row(f"f{k:02}") for k in range(count)]
    rows += [row(f"x{k:02}", "failed", "It ran away. " * 8) for k in range(count)]
    found = table(rows, "sweep x", 80, lines)
    assert len(found) <= lines
    assert found[0].startswith(f"{2 * count} runs: {count} failed, {count} finished  (sweep x)")
    if lines == 80 and count == 4:
        assert not any("... and" in line for line in found)
    if lines == 24 and count == 50:
        assert "x00" == found[2].split()[0]
        hidden = next(line for line in found if line.startswith("... and "))
        shown = sum(re.match(r"[fx]\d\d  ", line) is not None for line in found)
        assert f"... and {100 - shown} runs: " in hidden


def test_counts_are_said_in_words() -> None:
    assert "1 run: 1 failed" == counts([row("a", "failed")])
    assert "3 runs: 2 finished, 1 failed" == counts([row("a"), row("b", "failed"), row("c")])


def test_texts_are_cut_by_the_cells_they_take_and_made_safe() -> None:
    assert "abcdef" == fitted("abcdef", 6)
    assert "abcd~" == fitted("abcdef", 5)
    assert "雪雪~" == fitted("雪雪雪雪", 6)
    assert 4 == cells("雪e\u0301a")
    assert "a\\u001b[2J b" == fitted("a\x1b[2J\nb", 40)


def test_runs_that_have_ended_are_not_read_again(
    sweep: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """Unless their sign of life changes: a run that failed may be begun again."""
    looked: list[str] = []
    real = module.condition_of

    def counted(folder: Path) -> Condition:
        looked.append(folder.name)
        return real(folder)

    monkeypatch.setattr(module, "condition_of", counted)
    watched = module._Watched(sweep)
    watched.rows()
    assert ["aa", "bb", "cc", "dd", "ee"] == looked
    looked.clear()
    os.utime(sweep / "runs" / "cc" / PROGRESS_FILE, (1.0, 1.0))
    watched.rows()
    assert ["cc", "dd", "ee"] == looked


class Terminal:
    """A terminal of 80 columns and 20 lines, and the command that runs in it."""

    def __init__(self, *arguments: str | Path, **environment: str) -> None:
        self._ours, theirs = pty.openpty()
        termios.tcsetwinsize(theirs, (20, 80))
        before = signal.signal(signal.SIGINT, signal.SIG_DFL)
        try:
            self.process = subprocess.Popen(
                [sys.executable, "-m", "driftwell", *map(str, arguments)],
                stdin=theirs,
                stdout=theirs,
                stderr=theirs,
                env={**os.environ, "TERM": "xterm", "PYTHONIOENCODING": "utf-8", **environment},
            )
        finally:
            signal.signal(signal.SIGINT, before)
        os.close(theirs)
        self.written = ""

    def until(self, pattern: str, seconds: float = 60.0) -> None:
        """Read on until the pattern has been written."""
        end = time.monotonic() + seconds
        while not re.search(pattern, self.written):
            assert time.monotonic() < end, self.written
            if select.select([self._ours], [], [], 0.2)[0]:
                self.written += os.read(self._ours, 65536).decode()

    def ends(self) -> int:
        """Read to the end; the exit code."""
        with suppress(OSError):  # the other side has closed it
            while some := os.read(self._ours, 65536):
                self.written += some.decode()
        os.close(self._ours)
        return self.process.wait(timeout=60)


def screen(written: str) -> list[str]:
    """What a terminal shows after all that was written to it."""
    lines: list[str] = [""]
    at = 0
    for up, clear, new, text in re.findall(
        r"\x1b\[(\d+)A\r|\x1b\[([KJ])|(\r?\n)|([^\x1b\r\n]+)", written
    ):
        if up:
            at -= int(up)
            assert at >= 0
        elif new:
            at += 1
            lines += [""] * (at + 1 - len(lines))
        elif clear == "J":
            del lines[at + 1 :]
            lines[at] = ""
        elif text:
            lines[at] = text
    return lines


def test_a_terminal_shows_a_run_live_and_the_command_ends_with_the_run(tmp_path: Path) -> None:
    folder = run_folder(tmp_path / "trap")
    change(folder, left=50.0)
    terminal = Terminal("watch", folder)
    terminal.until(r"(?s)going on.*going on")
    change(folder, outcome="finished", time=2e-4)
    assert 0 == terminal.ends()
    written = terminal.written
    assert "\x1b[2A\r" in written
    assert "\x1b[2J" not in written  # nothing is cleared before it is written again
    assert "\x1b[H" not in written
    head, row, *rest = screen(written)
    assert "run" == head.split()[0]
    assert row.startswith("trap  finished  ")
    assert "100.0 %" in row
    assert [""] == rest


def test_ctrl_c_ends_watching_with_0_and_the_run_goes_on(tmp_path: Path) -> None:
    folder = tmp_path / "run"
    path = scenario(tmp_path)
    running = started("run", path, "-o", folder, "--no-pictures", *settings(*LONG))
    try:
        end = time.monotonic() + 120.0
        while not (folder / PROGRESS_FILE).exists():
            assert time.monotonic() < end
            assert running.poll() is None
            time.sleep(0.1)
        terminal = Terminal("watch", folder)
        terminal.until("going on")
        terminal.process.send_signal(signal.SIGINT)
        assert 0 == terminal.ends()
        assert "Traceback" not in terminal.written
        assert running.poll() is None
    finally:
        running.kill()
        running.communicate()
    done = Terminal("watch", folder)
    assert 0 == done.ends()
    assert "cut off" in done.written
    assert "its process is gone" in done.written


def test_a_sweep_is_watched_until_nothing_goes_on_there(
    sweep: Path, monkeypatch: pytest.MonkeyPatch, capsys: Printed
) -> None:
    (sweep / "runs" / "dd").joinpath(PROGRESS_FILE).unlink()
    monkeypatch.setattr(module, "_QUIET", 0.2)
    monkeypatch.setattr(module, "_REDRAWN", 0.05)
    assert 0 == module._live(module._Watched(sweep))
    assert capsys.readouterr().out.count("5 runs: ") >= 3


def test_a_terminal_that_knows_no_signs_gets_text_once(tmp_path: Path) -> None:
    terminal = Terminal("watch", run_folder(tmp_path / "trap"), TERM="dumb")
    assert 0 == terminal.ends()
    assert "\x1b" not in terminal.written
    assert 1 == terminal.written.count("going on")


def test_a_narrower_terminal_is_written_over_where_the_lines_were_broken() -> None:
    assert module._over(["a" * 30, "b"], ["c"], 20).startswith("\x1b[3A\r")
    assert module._over(["a" * 30, "b"], ["c"], 40).startswith("\x1b[2A\r")
    assert "c\x1b[K\n\x1b[J" == module._over([], ["c"], 40)
