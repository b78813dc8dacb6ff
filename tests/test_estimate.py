"""What a run will cost is told before it begins: its parts fit together, and its disk is right.

No test asserts a time: machines differ, and are busy with other things.
"""

from __future__ import annotations

import math
import tempfile
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from driftwell.assembly import assembled
from driftwell.errors import RecordError, ScenarioError, StepError
from driftwell.estimate import Estimate, _kept, estimate, twice_as_long
from driftwell.run import run
from driftwell.scenario import room
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.stepping.schedule import Schedule
from driftwell.timed_run import Stretch, timed_steps
from tests.cli.small_runs import PAIR, SMALL, scenario
from tests.running import Unwatched


def loaded(folder: Path, *settings: str, text: str = SMALL) -> LoadedScenario:
    return read_scenario(scenario(folder, text), settings)


def consistent(found: Estimate) -> None:
    """What holds of every estimate."""
    assert 0.0 < found.least < found.seconds < found.most < math.inf
    assert min(found.parts.values()) >= 0.0
    assert math.isclose(found.seconds, math.fsum(found.parts.values()), rel_tol=1e-9)
    assert found.parts[found.dominant] == max(found.parts.values())
    assert 0.0 < found.timed.fastest <= found.timed.slowest
    assert all(change.seconds < found.seconds for change in found.changes)
    assert sorted(change.seconds for change in found.changes) == [
        change.seconds for change in found.changes
    ]


def test_an_estimate_says_how_much_the_run_is_and_what_it_takes(tmp_path: Path) -> None:
    given = loaded(tmp_path, "duration=20 ms")
    found = estimate(given, seconds=0.3)
    consistent(found)
    parts = assembled(given)
    assert (8, 1, "direct") == (found.charges, found.threads, found.method)
    assert parts.schedule.total_steps == found.steps
    assert (20_001, 2) == (found.records, found.snapshots)
    assert parts.extent.memory() == found.memory
    assert found.timed.steps < found.steps
    assert not found.ended
    longer = estimate(loaded(tmp_path, "duration=200 ms"), seconds=0.3)
    assert abs(longer.steps - 10 * found.steps) <= 10
    assert longer.disk > 9 * found.disk


def test_nothing_is_left_behind(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Neither beside the scenario nor in the folder for temporary files."""
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "temporary"))
    (tmp_path / "temporary").mkdir()
    given = loaded(tmp_path)
    monkeypatch.chdir(tmp_path)
    estimate(given, seconds=0.1)
    assert [] == list((tmp_path / "temporary").iterdir())
    assert {"small.toml", "temporary"} == {each.name for each in tmp_path.iterdir()}


def test_the_disk_is_what_a_real_run_writes(tmp_path: Path) -> None:
    """Within a tenth; the run itself is not changed by having been estimated."""
    given = loaded(tmp_path, "cloud.load.count=200", "duration=40 us", "record.every=0.2 us")
    found = estimate(given, seconds=0.3)
    result = run(given, tmp_path / "run", Unwatched())
    assert "finished" == result.outcome.word
    size = sum(file.stat().st_size for file in (tmp_path / "run").rglob("*") if file.is_file())
    assert 0.9 * found.disk < size < 1.1 * found.disk + found.events
    assert found.steps == result.outcome.steps


def test_charges_that_do_not_feel_each_other_have_no_pair_sum(tmp_path: Path) -> None:
    found = estimate(loaded(tmp_path, "coulomb.method=off"), seconds=0.2)
    consistent(found)
    assert "off" == found.method
    assert 0.0 == found.parts["the pair sum"]


def test_many_charges_spend_their_time_in_the_pair_sum_and_halving_them_helps(
    tmp_path: Path,
) -> None:
    """Of 1500 charges nearly all time goes there, on any machine."""
    more = ("cloud.load.count=1500", "coulomb.softening=1 um", "record.every=10 us")
    found = estimate(loaded(tmp_path, *more), seconds=1.0)
    consistent(found)
    assert "the pair sum" == found.dominant
    words = [change.words for change in found.changes]
    assert "half the charges, each of twice the weight" in words
    assert "steps twice as long" in words


def test_a_longer_step_is_named_by_its_key(tmp_path: Path) -> None:
    more = ("cloud.load.count=300", "record.every=10 us")
    for settings, expected in (
        ((), "stepping.step=40 ns"),
        (("stepping.step=auto",), "stepping.steps_per_period=50"),
    ):
        found = estimate(loaded(tmp_path, *more, *settings), seconds=0.3)
        named = [change.settings for change in found.changes if "steps" in change.words]
        assert [(expected,)] == named
        read_scenario(tmp_path / "small.toml", [*more, *settings, expected])


def test_the_tree_is_named_where_the_direct_sum_was_asked_for_and_it_pays(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    more = ["cloud.load.count=2000", "coulomb.softening=1 um", "record.every=10 us"]
    for border, named in ((500, True), (10**6, False)):
        monkeypatch.setattr(
            "driftwell.coulomb.summation.crossover", lambda contest, border=border: border
        )
        given = loaded(tmp_path, *more, "coulomb.method=direct")
        found = estimate(given, seconds=0.3)
        trees = [change for change in found.changes if change.settings == ("coulomb.method=tree",)]
        assert named == bool(trees)
    assert [] == [change for change in found.changes if change.settings == ("coulomb.method=tree",)]


def test_a_run_in_which_all_are_lost_ends_there(tmp_path: Path) -> None:
    """Let go at 1e9 K, eight ions meet the wall soon."""
    given = loaded(tmp_path, 'cloud.load.motion={temperature="1e9 K"}', "duration=20 ms")
    found = estimate(given, seconds=1.0)
    consistent(found)
    assert found.ended
    assert 0 == found.timed.left
    assert found.steps < assembled(given).schedule.total_steps
    assert found.records < 200


def test_motion_that_cannot_be_continued_is_told_as_the_run_would_tell_it(tmp_path: Path) -> None:
    with pytest.raises(StepError, match="falls towards an opposite charge"):
        estimate(loaded(tmp_path, text=PAIR), seconds=0.5)


def test_a_run_of_a_single_step_and_charge_is_estimated(tmp_path: Path) -> None:
    more = ("cloud.load.count=1", "duration=20 ns", "record.every=20 ns", "question=[]")
    found = estimate(loaded(tmp_path, *more), seconds=0.1)
    consistent(found)
    assert (1, 1, 2) == (found.steps, found.timed.steps, found.records)


def test_a_run_too_large_for_memory_is_refused_as_the_run_would_be(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(room, "free_memory", lambda: 1_000_000)
    with pytest.raises(ScenarioError, match="The run needs about"):
        estimate(loaded(tmp_path), seconds=0.1)


def test_a_temporary_folder_that_cannot_be_written_is_told(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(tempfile, "tempdir", str(tmp_path / "missing"))
    with pytest.raises(RecordError, match="environment variable TMPDIR") as told:
        estimate(loaded(tmp_path), seconds=0.1)
    assert "No such file or directory" in str(told.value)


def test_timing_goes_on_where_it_is_and_stops_in_time(tmp_path: Path) -> None:
    """Steps are counted once: two stretches to the end of a run make up all its steps but one."""
    parts = assembled(loaded(tmp_path, "duration=10 us"))
    loop = parts.time_loop(1)
    found = timed_steps(loop, 60.0)
    assert parts.schedule.total_steps - 1 == found.steps
    assert loop.steps_done == parts.schedule.total_steps
    assert (8, 8) == (found.alive, found.left)


def test_losses_that_go_on_make_later_steps_cheaper() -> None:
    """Half lost in 100 steps: as cost follows n^p, the mean over 1000 steps is known exactly."""
    stretch = Stretch(100, 1.0, 0.01, 0.01, 1000, 500)
    for power in (1, 2):
        alive = 0.5 ** (np.arange(100_000) / 10_000.0)  # hundredths of a step, to 1000 steps
        cost = alive**power
        expected = cost.mean() / cost[:10_000].mean()
        assert math.isclose(expected, _kept(stretch, 1000, power), rel_tol=1e-3)
    assert 1.0 == _kept(stretch, 100, 2)
    for left in (0, 1000):
        assert 1.0 == _kept(replace(stretch, left=left), 1000, 2)


def test_births_take_nothing_off_later_steps() -> None:
    """Of a source that has just begun there was nothing to lose a part of."""
    for alive in (0, 20):
        assert 1.0 == _kept(Stretch(100, 1.0, 0.01, 0.01, alive, 64), 1_000_000, 2)


def test_steps_twice_as_long_keep_every_mark_and_multiple() -> None:
    plan = Schedule(np.arange(5.0), np.zeros(5, np.int64), np.array([1, 2, 3, 100]))
    assert 1 + 1 + 2 + 50 == twice_as_long(plan, 1)
    plan = Schedule(np.arange(4.0), np.zeros(4, np.int64), np.array([4, 8, 12]))
    assert 4 + 4 + 8 == twice_as_long(plan, 4)
