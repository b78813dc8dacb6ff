"""A sweep computes what is missing, once, and reports what fails without stopping for it."""

from __future__ import annotations

import shutil
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from driftwell import open_run
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from driftwell.study.engine import Task
from driftwell.study.progress import SweepResult
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import run_folder
from tests.cli.small_runs import scenario
from tests.running import Unwatched
from tests.study.small_sweeps import Heard, Memory, Points, Scripted, ended, study_of

SHORT = "duration=2 us"
SEEDS = tuple((f"seed={k}", SHORT) for k in range(1, 6))


def finished(task: Task) -> dict[str, Any]:
    return ended("finished", value=float(task.content["settings"][0].split("=")[1]))


def swept(
    study: Points,
    folder: Path,
    memory: Memory,
    reply: Callable[[Task], dict[str, Any] | str] = finished,
    heard: Heard | None = None,
    **options: Any,
) -> tuple[SweepResult, Scripted]:
    """A sweep whose runs are answered by `reply`."""
    engine = Scripted(reply)
    observer = heard or Heard()
    found = Sweep(study, folder, memory, observer, engine_of=engine.of, **options).result()
    return found, engine


def counts(result: SweepResult) -> tuple[int, int, int, int]:
    """Computed, there, failed, left."""
    found = result.progress
    return found.computed, found.there, found.failed, found.left


def test_every_case_is_computed_once_and_its_answers_kept(tmp_path: Path) -> None:
    study, memory = study_of(scenario(tmp_path), *SEEDS), Memory()
    result, engine = swept(study, tmp_path / "s", memory)
    assert (5, 0, 0, 0) == counts(result)
    assert [1.0, 2.0, 3.0, 4.0, 5.0] == [
        result.answers[result.digests[number]][0].value for number in range(1, 6)
    ]
    assert 5 == len({content["folder"] for content in engine.asked})
    assert ["finished"] * 5 == [entry.word for entry in memory.rows()]
    assert engine.closed
    assert not result.stopped


def test_a_task_says_all_a_worker_needs(tmp_path: Path) -> None:
    path = scenario(tmp_path)
    _, engine = swept(study_of(path, SEEDS[0]), tmp_path / "s", Memory())
    digest = read_scenario(path, SEEDS[0]).digest
    assert [
        {
            "scenario": str(path),
            "settings": ["seed=1", SHORT],
            "digest": digest,
            "folder": str(tmp_path / "s" / "runs" / digest[:16]),
            "threads": 1,
            "fresh": False,
        }
    ] == engine.asked


def test_what_the_catalogue_knows_as_ended_is_not_computed_again(tmp_path: Path) -> None:
    memory = Memory()
    path = scenario(tmp_path)
    swept(study_of(path, *SEEDS[:3]), tmp_path / "s", memory)
    heard = Heard()
    result, engine = swept(study_of(path, *SEEDS), tmp_path / "s", memory, heard=heard)
    assert (2, 3, 0, 0) == counts(result)
    assert [["seed=4", SHORT], ["seed=5", SHORT]] == [each["settings"] for each in engine.asked]
    again, engine = swept(study_of(path, *SEEDS), tmp_path / "s", memory, heard=heard)
    assert (0, 5, 0, 0) == counts(again)
    assert [] == engine.asked
    assert result.answers == again.answers
    assert again.sharing is None


def test_content_counts_not_how_it_is_written(tmp_path: Path) -> None:
    """One run for the cases of equal content, in this sweep and in the next."""
    path, memory = scenario(tmp_path), Memory()
    same = [("duration=2 us",), ("duration=2000 ns",), ("duration=0.002 ms", "seed=7")]
    result, engine = swept(
        study_of(path, *same, ("duration=3 us",)),
        tmp_path / "s",
        memory,
        lambda _: ended("finished"),
    )
    assert (4, 0, 0, 0) == counts(result)
    assert 2 == len(engine.asked)
    assert [[1, 2, 3], [4]] == [entry.numbers for entry in memory.entries.values()]
    result, engine = swept(study_of(path, *same), tmp_path / "s", memory)
    assert (0, 3, 0, 0) == counts(result)


def test_a_case_that_is_no_scenario_is_reported_and_the_others_are_computed(
    tmp_path: Path,
) -> None:
    study = study_of(scenario(tmp_path), SEEDS[0], ("duration=2 m",), SEEDS[1])
    heard = Heard()
    result, _ = swept(study, tmp_path / "s", Memory(), heard=heard)
    assert (2, 0, 1, 0) == counts(result)
    (failure,) = result.failures
    assert (2, ("duration=2 m",)) == (failure.number, failure.settings)
    assert '--set "duration=2 m"' in failure.reason or "duration" in failure.reason
    assert [failure] == heard.failures


@pytest.mark.parametrize(
    ("said", "reason"),
    [
        (ended("failed", "Charge 3 has run away."), "Charge 3 has run away."),
        (ended("broken off", "Too little memory."), "Too little memory."),
        (ended("not recorded", "The disk is full."), "The disk is full."),
        ("The process was lost.", "The process was lost."),
    ],
)
def test_a_run_that_comes_to_nothing_is_reported_and_the_others_are_computed(
    said: dict[str, Any] | str, reason: str, tmp_path: Path
) -> None:
    memory = Memory()
    study = study_of(scenario(tmp_path), *SEEDS)
    result, _ = swept(
        study,
        tmp_path / "s",
        memory,
        lambda task: said if "seed=3" in task.content["settings"] else finished(task),
    )
    assert (4, 0, 1, 0) == counts(result)
    assert [(3, reason)] == [(each.number, each.reason) for each in result.failures]
    assert reason == memory.entries[result.digests[3]].sentence


def test_a_motion_that_failed_is_started_over_only_where_asked(tmp_path: Path) -> None:
    memory = Memory()
    study = study_of(scenario(tmp_path), *SEEDS[:2])
    swept(study, tmp_path / "s", memory, lambda _: ended("failed", "It ran away."))
    result, engine = swept(study, tmp_path / "s", memory)
    assert (0, 0, 2, 0) == counts(result)
    assert [(True, "It ran away.")] * 2 == [(each.before, each.reason) for each in result.failures]
    assert [] == engine.asked
    result, engine = swept(study, tmp_path / "s", memory, retry_failed=True)
    assert (2, 0, 0, 0) == counts(result)
    assert [True, True] == [content["fresh"] for content in engine.asked]


def test_what_was_broken_off_is_tried_again_by_the_next_sweep(tmp_path: Path) -> None:
    memory = Memory()
    study = study_of(scenario(tmp_path), *SEEDS[:2])
    swept(study, tmp_path / "s", memory, lambda _: "The process was lost.")
    result, engine = swept(study, tmp_path / "s", memory)
    assert (2, 0, 0, 0) == counts(result)
    assert [False, False] == [content["fresh"] for content in engine.asked]


def test_that_all_charges_are_lost_is_an_answer(tmp_path: Path) -> None:
    memory = Memory()
    study = study_of(scenario(tmp_path), *SEEDS[:2])
    result, _ = swept(study, tmp_path / "s", memory, lambda _: ended("all lost"))
    assert (2, 0, 0, 0) == counts(result)
    assert (0, 2, 0, 0) == counts(swept(study, tmp_path / "s", memory)[0])


def test_a_run_somebody_else_stops_is_begun_again_and_in_the_end_given_up(tmp_path: Path) -> None:
    said = {"seed=1": iter(["stopped", "finished"]), "seed=2": iter(["stopped"] * 3)}
    result, engine = swept(
        study_of(scenario(tmp_path), *SEEDS[:2]),
        tmp_path / "s",
        Memory(),
        lambda task: ended(next(said[task.content["settings"][0]]), "Asked to stop."),
    )
    assert (1, 0, 1, 0) == counts(result)
    assert 5 == len(engine.asked)
    assert "Asked to stop." == result.failures[0].reason


def test_a_stop_leaves_the_rest_and_reports_no_failures_by_it(tmp_path: Path) -> None:
    memory = Memory()

    def until_two(task: Task) -> dict[str, Any] | str:
        time.sleep(0.15)  # the observer is asked now and then, not after each run
        if len(memory_done()) < 2:
            return finished(task)
        return ended("stopped") if task.content["settings"][0] == "seed=3" else "It was lost."

    def memory_done() -> list[str]:
        return [entry.digest for entry in memory.rows() if entry.word == "finished"]

    study = study_of(scenario(tmp_path), *SEEDS)
    heard = Heard(lambda progress: progress.computed < 2)
    result, engine = swept(study, tmp_path / "s", memory, until_two, heard)
    assert result.stopped
    assert engine.stopped
    assert 2 <= result.progress.computed
    assert 0 == result.progress.failed
    assert 5 == result.progress.computed + result.progress.left
    again, _ = swept(study, tmp_path / "s", memory)
    assert (result.progress.left, result.progress.computed, 0, 0) == counts(again)


def test_a_sweep_that_is_stopped_before_it_begins_starts_no_worker(tmp_path: Path) -> None:
    study = study_of(scenario(tmp_path), *SEEDS)
    result, engine = swept(study, tmp_path / "s", Memory(), heard=Heard(lambda _: False))
    assert result.stopped
    assert [] == engine.asked
    assert 5 == result.progress.left


def test_a_finished_run_the_catalogue_does_not_know_is_read_from_its_folder(
    tmp_path: Path,
) -> None:
    path, folder = scenario(tmp_path), tmp_path / "s"
    loaded = read_scenario(path, SEEDS[0])
    expected = run(loaded, run_folder(folder, loaded.digest), Unwatched())
    memory = Memory()
    result, engine = swept(study_of(path, *SEEDS[:2]), folder, memory)
    assert (1, 1, 0, 0) == counts(result)
    assert [["seed=2", SHORT]] == [content["settings"] for content in engine.asked]
    assert tuple(expected.answers) == result.answers[loaded.digest]
    assert "finished" == memory.entries[loaded.digest].word
    shutil.rmtree(folder)
    assert (0, 2, 0, 0) == counts(swept(study_of(path, *SEEDS[:2]), folder, memory)[0])


def test_a_real_sweep_gives_what_the_runs_give_by_themselves(tmp_path: Path) -> None:
    """Two worker processes; one case fails in its motion, one is no scenario."""
    path, folder, memory = (
        scenario(tmp_path, name="of é and spaces.toml"),
        tmp_path / "a s",
        Memory(),
    )
    far = ("wall=[]", 'cloud.load.motion.temperature="1e9 K"', "stepping.extent=1 mm")
    study = study_of(path, *SEEDS[:3], far, ("seed=-1",))
    heard = Heard()
    result = Sweep(study, folder, memory, heard, workers=2).result()
    assert (3, 0, 2, 0) == counts(result), result.failures
    assert [4, 5] == [failure.number for failure in result.failures]
    assert "The motion could not be continued" in result.failures[0].reason
    for number in (1, 2, 3):
        alone = run(read_scenario(path, SEEDS[number - 1]), tmp_path / f"r{number}", Unwatched())
        assert tuple(alone.answers) == result.answers[result.digests[number]]
        mine = open_run(run_folder(folder, result.digests[number]))
        assert open_run(alone.folder).trajectory[1].tobytes() == mine.trajectory[1].tobytes()
    assert 5 == heard.progress[-1].cases
    assert (2, 1) == (heard.sharing[0].workers, heard.sharing[0].threads)
    assert (0, 3, 2, 0) == counts(Sweep(study, folder, memory, Heard()).result())
