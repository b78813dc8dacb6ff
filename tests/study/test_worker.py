"""A worker answers every task, whatever goes wrong, and stops in order when it is to end."""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import pytest

from driftwell import open_run
from driftwell.errors import BusyError
from driftwell.record.master import MASTER
from driftwell.scenario.read import read_scenario
from driftwell.study import worker as worker_module
from driftwell.study.engine import Task
from driftwell.study.pool import Pool, worker_environment
from tests.cli.small_runs import LONG, scenario
from tests.study.test_pool import all_done, until_gone

SHORT = ("duration=2 us",)
PATIENCE = 240.0
"""s, for a first compilation on a busy machine."""


@pytest.fixture(scope="module", autouse=True)
def compiled(tmp_path_factory: pytest.TempPathFactory) -> None:
    """A worker that compiles would be told to stop before it has something to seal."""
    folder = tmp_path_factory.mktemp("compiled")
    assert "finished" == replied(content(scenario(folder), folder / "run"))["word"]


def content(path: Path, folder: Path, settings: tuple[str, ...] = SHORT) -> dict[str, Any]:
    """What a worker is told."""
    return {
        "key": "a",
        "scenario": str(path),
        "settings": list(settings),
        "digest": read_scenario(path, settings).digest,
        "folder": str(folder),
        "threads": 1,
        "fresh": False,
    }


def replied(told: dict[str, Any]) -> dict[str, Any]:
    """What a worker in this process answers."""
    return worker_module._reply(told, worker_module._Wish())


def test_a_run_is_answered_with_its_ending_its_times_and_its_answers(tmp_path: Path) -> None:
    reply = replied(content(scenario(tmp_path), tmp_path / "run"))
    assert ("finished", 0) == (reply["word"], reply["exit_code"])
    found = open_run(tmp_path / "run")
    assert found.outcome.sentence == reply["sentence"]
    assert found.outcome.wall_time == reply["wall_time"] <= reply["seconds"]
    assert [answer.value for answer in found.answers] == [
        answer["value"] for answer in reply["answers"]
    ]
    assert {"name", "ask", "value", "unit", "error", "note", "coulomb_error", "field_error"} == set(
        reply["answers"][0]
    )


def test_a_motion_that_fails_is_answered_with_its_reason(tmp_path: Path) -> None:
    far = ("wall=[]", 'cloud.load.motion.temperature="1e9 K"', "stepping.extent=1 mm")
    reply = replied(content(scenario(tmp_path), tmp_path / "run", far))
    assert ("failed", 5) == (reply["word"], reply["exit_code"])
    assert reply["sentence"].startswith("The motion could not be continued")


def test_a_scenario_that_is_gone_or_changed_meanwhile_is_answered(tmp_path: Path) -> None:
    path = scenario(tmp_path)
    told = content(path, tmp_path / "run")
    path.write_text(path.read_text().replace("seed = 7", "seed = 8"))
    reply = replied(told)
    assert ("broken off", 2) == (reply["word"], reply["exit_code"])
    assert "was changed while the sweep went on" in reply["sentence"]
    path.unlink()
    assert "there is no such file" in replied(told)["sentence"]
    assert not (tmp_path / "run").exists()


def test_a_folder_that_cannot_be_used_is_answered(tmp_path: Path) -> None:
    (tmp_path / "run").write_text("mine")
    reply = replied(content(scenario(tmp_path), tmp_path / "run"))
    assert ("broken off", 2) == (reply["word"], reply["exit_code"])
    assert "is a file; a run needs a folder" in reply["sentence"]


@pytest.mark.parametrize(
    ("fault", "told", "exit_code"),
    [
        (
            MemoryError("Unable to allocate 2.98 TiB"),
            "This machine has too little memory for the run (Unable to allocate 2.98 TiB).",
            2,
        ),
        (KeyError("a thing"), "This is a defect of driftwell", 1),
        (RecursionError("too deep"), "This is a defect of driftwell", 1),
    ],
)
def test_what_else_goes_wrong_is_answered(
    fault: Exception, told: str, exit_code: int, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def broken(*_: object, **__: object) -> None:
        raise fault

    monkeypatch.setattr(worker_module, "run", broken)
    reply = replied(content(scenario(tmp_path), tmp_path / "run"))
    assert ("broken off", exit_code) == (reply["word"], reply["exit_code"])
    assert reply["sentence"].startswith(told)
    assert [] == reply["answers"]


def test_a_folder_another_process_is_leaving_is_waited_for(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    """As after a kill of the driver, whose workers seal what they had."""
    real, tries = worker_module.run, []

    def busy_twice(*given: Any, **more: Any) -> Any:
        tries.append(given)
        if len(tries) < 3:
            raise BusyError("in use")
        return real(*given, **more)

    monkeypatch.setattr(worker_module, "run", busy_twice)
    monkeypatch.setattr(worker_module, "_BUSY_PAUSE", 0.01)
    told = content(scenario(tmp_path), tmp_path / "run")
    assert "finished" == replied(told)["word"]
    assert 3 == len(tries)
    monkeypatch.setattr(worker_module, "_BUSY_PATIENCE", 0.0)
    tries.clear()
    assert ("broken off", "in use") == tuple(map(replied(told).get, ("word", "sentence")))


def begun(engine: Pool, folder: Path) -> None:
    """Until the run in `folder` is under way."""
    end = time.monotonic() + PATIENCE
    while not (folder / MASTER).exists():
        assert engine.next(0.1) is None
        assert time.monotonic() < end
    time.sleep(1.5)


def test_a_worker_that_is_to_stop_seals_its_run_answers_and_ends(tmp_path: Path) -> None:
    folder = tmp_path / "run"
    with Pool.of_runs(1, 1) as engine:
        engine.submit(Task("a", content(scenario(tmp_path), folder, LONG)))
        begun(engine, folder)
        pids = engine.pids
        engine.stop()
        reply = all_done(engine, 1)["a"].reply
        until_gone(pids)
    assert reply is not None
    assert ("stopped", 4) == (reply["word"], reply["exit_code"])
    found = open_run(folder)
    assert "stopped" == found.outcome.word
    assert found.end_time > 0.0
    assert [] == found.damage(thorough=True)


def test_a_worker_that_has_not_begun_to_step_ends_at_once(tmp_path: Path) -> None:
    """While it compiles, which would take half a minute, or waits."""
    environment = {**worker_environment(1), "DRIFTWELL_CACHE": str(tmp_path / "cache")}
    command = [sys.executable, "-m", "driftwell.study.worker"]
    with Pool(1, command, environment) as engine:
        engine.submit(Task("a", content(scenario(tmp_path), tmp_path / "run")))
        while not engine.under_way():
            engine.next(0.1)
        time.sleep(5.0)  # it has loaded its libraries by then, also on a busy machine
        began = time.monotonic()
        engine.stop()
        reply = all_done(engine, 1)["a"].reply
        assert time.monotonic() - began < 10.0
    assert reply is not None
    assert "stopped" == reply["word"]
    assert not (tmp_path / "run" / MASTER).exists()


DRIVER = """\
import json, sys, time
from driftwell.study.engine import Task
from driftwell.study.pool import Pool

engine = Pool.of_runs(1, 1)
engine.submit(Task("a", json.loads(sys.argv[1])))
while not engine.under_way():
    engine.next(0.1)
print(*engine.pids, flush=True)
time.sleep(600)
"""


def test_a_worker_whose_driver_is_killed_seals_its_run_and_ends(tmp_path: Path) -> None:
    folder = tmp_path / "run"
    told = content(scenario(tmp_path), folder, LONG)
    driver = subprocess.Popen(
        [sys.executable, "-c", DRIVER, json.dumps(told)],
        stdout=subprocess.PIPE,
        text=True,
        env=worker_environment(1),
    )
    assert driver.stdout is not None
    pids = [int(word) for word in driver.stdout.readline().split()]
    end = time.monotonic() + PATIENCE
    while not (folder / MASTER).exists():
        assert time.monotonic() < end
        time.sleep(0.05)
    time.sleep(1.5)
    os.kill(driver.pid, signal.SIGKILL)
    driver.communicate()
    until_gone(pids)
    found = open_run(folder)
    assert "stopped" == found.outcome.word
    assert [] == found.damage(thorough=True)
