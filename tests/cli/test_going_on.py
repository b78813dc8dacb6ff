"""The same command again: it goes on, tells again, or refuses, and never over old results."""

from __future__ import annotations

import multiprocessing
import re
from pathlib import Path

import numpy as np
import pytest

from driftwell import open_run
from driftwell.cli.main import main
from driftwell.record import earlier as earlier_module
from driftwell.record.index import SEGMENTS
from driftwell.record.lock import LOCK, held
from driftwell.record.master import ANSWERS_FILE, LAST_FILE, MASTER
from driftwell.run import Progress
from driftwell.run import run as carry_out
from driftwell.scenario.read import read_scenario
from tests.cli.small_runs import LONG, SMALL, scenario, settings
from tests.running import Unwatched

Printed = pytest.CaptureFixture[str]
SHORT = ("duration=2 us",)


def run(folder: Path, *texts: str, more: tuple[str, ...] = (), text: str = SMALL) -> int:
    """Exit code of the small scenario, in ``folder / "run"``."""
    path = scenario(folder, text)
    words = ["run", str(path), "-o", str(folder / "run"), "--no-pictures", *settings(*texts), *more]
    return main(words)


def stamps(folder: Path) -> dict[Path, int]:
    """When each file was last changed."""
    return {path: path.stat().st_mtime_ns for path in folder.rglob("*") if path.is_file()}


def test_a_run_that_has_ended_is_told_again_and_left_as_it_is(
    tmp_path: Path, capsys: Printed
) -> None:
    """The same lines on stdout, and nothing computed."""
    assert 0 == run(tmp_path, *SHORT)
    before, first = stamps(tmp_path / "run"), capsys.readouterr()
    assert 0 == run(tmp_path, *SHORT)
    again = capsys.readouterr()
    assert "Not computed again: the record is whole; --fresh does." in again.err
    assert first.out == again.out
    assert before == stamps(tmp_path / "run")


def test_fresh_puts_the_old_run_aside_and_starts_over(tmp_path: Path, capsys: Printed) -> None:
    """Under a name that is free; the old one can be read as before."""
    assert 0 == run(tmp_path, *SHORT)
    for number in (1, 2):
        assert 0 == run(tmp_path, *SHORT, more=("--fresh",))
        aside = tmp_path / f"run-before-{number}"
        assert f"The run that was there is kept as {aside}." in capsys.readouterr().err
        assert "finished" == open_run(aside).outcome.word
        assert not (aside / LOCK).exists()
    assert "finished" == open_run(tmp_path / "run").outcome.word


def test_a_run_stopped_by_the_clock_goes_on_where_it_stopped(
    tmp_path: Path, capsys: Printed
) -> None:
    """Its answers and what was kept for them are gone while it goes on."""
    given = LONG
    assert 4 == run(tmp_path, *given, more=("--stop-after", "0.6 s"))
    told = capsys.readouterr().out
    assert re.search(r"stopped: The time allowed was over; recorded up to t = .*, and the", told)
    stopped = open_run(tmp_path / "run")
    assert ("stopped", 4) == (stopped.outcome.word, stopped.outcome.exit_code)
    assert stopped.end_time == stopped.snapshots[-1]
    assert (tmp_path / "run" / LAST_FILE).exists()
    assert stopped.outcome.steps is not None
    assert 4 == run(tmp_path, *given, more=("--stop-after", "0.6 s"))
    later = open_run(tmp_path / "run")
    assert later.outcome.steps is not None
    assert later.outcome.wall_time is not None
    assert stopped.outcome.wall_time is not None
    assert later.outcome.steps > stopped.outcome.steps
    assert later.outcome.wall_time > stopped.outcome.wall_time
    told = capsys.readouterr().err
    assert f"Going on with the run begun {stopped.header.created}, from t = " in told
    assert f"after {stopped.outcome.steps} steps" in told


class Until(Unwatched):
    """Stops a run when it has gone beyond a time, s, and its steps beyond a number."""

    def __init__(self, time: float, steps: int = 0) -> None:
        self._time, self._steps = time, steps

    def goes_on(self, progress: Progress) -> bool:
        return progress.time <= self._time or progress.steps <= self._steps


def test_a_run_stopped_again_before_its_next_record_answers_for_its_last_one(
    tmp_path: Path,
) -> None:
    """From what the first stop kept beside the record."""
    given = ["duration=1000 s", "record.every=0.2 s", "stepping.step=20 ns"]
    loaded, folder = read_scenario(scenario(tmp_path), given), tmp_path / "run"
    assert "stopped" == carry_out(loaded, folder, Until(0.2)).outcome.word
    first = open_run(folder)
    assert 0.2 == pytest.approx(first.end_time)
    assert (folder / LAST_FILE).exists()
    kept = first.snapshot(first.end_time).position.tobytes()
    steps = first.outcome.steps or 0
    assert "stopped" == carry_out(loaded, folder, Until(0.2, steps)).outcome.word
    again = open_run(folder)
    assert (again.outcome.steps or 0) > steps
    assert first.end_time == again.end_time
    assert kept == again.snapshot(again.end_time).position.tobytes()
    assert first.answers == again.answers
    later = carry_out(loaded, folder, Until(0.4))
    assert "stopped" == later.outcome.word
    assert 0.4 == pytest.approx(open_run(folder).snapshots[-1])


@pytest.mark.parametrize("text", ["7", "h", "-3 s", "0 s", "3 weeks", ""])
def test_a_time_that_is_none_is_refused(text: str, tmp_path: Path, capsys: Printed) -> None:
    with pytest.raises(SystemExit) as left:
        run(tmp_path, more=("--stop-after", text))
    assert 2 == left.value.code
    assert "is no time such as 7h30m, 45 min or 90 s" in capsys.readouterr().err


@pytest.mark.parametrize(
    ("change", "why"),
    [
        ({"texts": ("duration=3 us",)}, r"the settings differ \(there: duration=2 us\)"),
        (
            {"texts": SHORT, "text": SMALL.replace("8", "9", 1)},
            r'it is of "Eight ions in a trap", and the scenario has changed since 20',
        ),
    ],
)
def test_a_changed_scenario_is_refused_in_words(
    change: dict[str, object], why: str, tmp_path: Path, capsys: Printed
) -> None:
    """And nothing is touched."""
    assert 0 == run(tmp_path, *SHORT)
    before = stamps(tmp_path / "run")
    texts, text = change["texts"], change.get("text", SMALL)
    assert 2 == run(tmp_path, *texts, text=text)  # type: ignore[misc,arg-type]
    told = capsys.readouterr().err.splitlines()[-1]
    assert re.search(f"{tmp_path / 'run'}: holds another run: {why}", told)
    assert "--fresh puts the old run aside and starts over; -o names another folder." in told
    assert before == stamps(tmp_path / "run")


def test_another_version_is_refused_and_another_library_is_told(
    tmp_path: Path, capsys: Printed, monkeypatch: pytest.MonkeyPatch
) -> None:
    given = LONG
    assert 4 == run(tmp_path, *given, more=("--stop-after", "0.3 s"))
    monkeypatch.setattr(earlier_module, "processor", lambda: "an abacus")
    assert 4 == run(tmp_path, *given, more=("--stop-after", "0.3 s"))
    assert "gone on with an abacus: from here on the last digits" in capsys.readouterr().err
    monkeypatch.setattr(earlier_module, "__version__", "99.0")
    assert 2 == run(tmp_path, *given)
    assert "and this is 99.0, whose steps may differ." in capsys.readouterr().err
    monkeypatch.undo()
    monkeypatch.setattr(earlier_module, "FORMAT_VERSION", 99)
    assert 2 == run(tmp_path, *given)
    assert "this driftwell writes 99. It can be read, but not gone on" in capsys.readouterr().err


def test_what_a_run_left_that_sealed_nothing_is_begun_again(tmp_path: Path) -> None:
    """Killed while it made its folder, at any point."""
    (tmp_path / "run" / SEGMENTS).mkdir(parents=True)
    (tmp_path / "run" / SEGMENTS / "000001.h5.part").write_bytes(b"half")
    assert 0 == run(tmp_path, *SHORT)
    found = open_run(tmp_path / "run")
    assert ("finished", []) == (found.outcome.word, found.damage(thorough=True))
    assert not list((tmp_path / "run").rglob("*.part"))


def test_a_folder_in_use_is_refused_with_the_name_of_who_uses_it(
    tmp_path: Path, capsys: Printed
) -> None:
    assert 0 == run(tmp_path, *SHORT)
    with held(tmp_path / "run"):
        assert 2 == run(tmp_path, *SHORT)
        assert 2 == run(tmp_path, *SHORT, more=("--fresh",))
    assert re.search(r"in use by process \d+ on .* since 20", capsys.readouterr().err)
    assert 0 == run(tmp_path, *SHORT)


def _die_holding(folder: str) -> None:
    """Leave by the hardest way, the lock in hand."""
    import os
    import signal

    with held(Path(folder)):
        os.kill(os.getpid(), signal.SIGKILL)


def test_the_lock_of_a_process_that_was_killed_holds_nobody(tmp_path: Path) -> None:
    assert 0 == run(tmp_path, *SHORT)
    killed = multiprocessing.get_context("spawn").Process(
        target=_die_holding, args=(str(tmp_path / "run"),)
    )
    killed.start()
    killed.join(60)
    assert -9 == killed.exitcode
    assert (tmp_path / "run" / LOCK).exists()
    assert 0 == run(tmp_path, *SHORT)
    assert not (tmp_path / "run" / LOCK).exists()


@pytest.mark.parametrize("harm", ["cut", "flip", "missing"])
def test_a_damaged_segment_is_named_and_not_gone_on_from(
    harm: str, tmp_path: Path, capsys: Printed
) -> None:
    given = LONG
    assert 4 == run(tmp_path, *given, more=("--stop-after", "0.3 s"))
    found = open_run(tmp_path / "run")
    last = tmp_path / "run" / found.segments[-1].name
    image = bytearray(last.read_bytes())
    if harm == "cut":
        last.write_bytes(image[:-100])
    elif harm == "flip":
        image[len(image) // 2] ^= 16
        last.write_bytes(image)
    else:
        (tmp_path / "run" / ANSWERS_FILE).unlink()
        last.unlink()
    before = stamps(tmp_path / "run")
    capsys.readouterr()
    assert 2 == run(tmp_path, *given)
    told = capsys.readouterr().err
    assert str(tmp_path / "run") in told
    if harm != "missing":
        assert f"{last}: damaged" in told
    assert before == stamps(tmp_path / "run")


def test_the_record_of_a_run_that_went_on_is_that_of_one_that_was_not_stopped(
    tmp_path: Path,
) -> None:
    """Every dataset and answer, after stops within intervals."""
    given = ("duration=2 ms", "record.every=0.5 ms", "stepping.step=20 ns")
    given += ("cloud.load.count=100", "coulomb.softening=5 um")
    (tmp_path / "whole").mkdir()
    assert 0 == run(tmp_path / "whole", *given)
    (tmp_path / "parts").mkdir()
    stops = 0
    while (code := run(tmp_path / "parts", *given, more=("--stop-after", "0.2 s"))) == 4:
        stops += 1
        assert stops < 50
    assert 0 == code
    assert stops >= 1
    whole, parts = (open_run(tmp_path / each / "run") for each in ("whole", "parts"))
    for path in ("trajectory/time", "trajectory/state", "ledger", "moments", "losses"):
        assert whole.rows(path).tobytes() == parts.rows(path).tobytes(), path
    assert whole.answers == parts.answers
    assert whole.snapshots == parts.snapshots
    assert (tmp_path / "parts" / "run" / MASTER).exists()
    assert not (tmp_path / "parts" / "run" / LAST_FILE).exists()
    for time in whole.snapshots:
        for one, other in zip(
            vars_of(whole.snapshot(time)), vars_of(parts.snapshot(time)), strict=True
        ):
            assert np.array_equal(one, other)


def vars_of(snapshot: object) -> list[object]:
    """All that a snapshot holds."""
    return [getattr(snapshot, name) for name in snapshot.__slots__]  # type: ignore[attr-defined]


def test_what_a_kill_in_the_very_last_write_left_goes_when_the_run_is_told_again(
    tmp_path: Path,
) -> None:
    path = scenario(tmp_path)
    command = ["run", str(path), "--no-pictures", "-o", str(tmp_path / "run")]
    assert 0 == main(command)
    left = tmp_path / "run" / "run.h5.part"
    left.write_bytes(b"half of it")
    assert 0 == main(command)
    assert not left.exists()
