"""Worker processes: deaths, garbage and silence of one harm neither its task nor another's."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import pytest

from driftwell.study.engine import Done, Engine, EngineError, Task
from driftwell.study.pool import Pool, worker_environment

STRANGE = [sys.executable, str(Path(__file__).with_name("strange_worker.py"))]
LONG = 60.0
"""s, in which everything here is over."""


@contextmanager
def pool(workers: int = 2, *more: str, **options: Any) -> Iterator[Pool]:
    with Pool(workers, [*STRANGE, *more], dict(os.environ), **options) as made:
        yield made


def all_done(engine: Engine, count: int) -> dict[str, Done]:
    """So many results, each once."""
    found: dict[str, Done] = {}
    end = time.monotonic() + LONG
    while len(found) < count:
        done = engine.next(0.2)
        assert time.monotonic() < end, f"only {sorted(found)}"
        if done is not None:
            assert done.key not in found
            found[done.key] = done
    assert engine.next(0.0) is None
    return found


def task(key: str, do: str = "work", **content: Any) -> Task:
    return Task(key, {"do": do, **content})


def alive(pid: int) -> bool:
    """Whether the process is there and not merely waiting to be buried."""
    try:
        state = Path(f"/proc/{pid}/stat").read_text().rsplit(")", 1)[1].split()[0]
    except OSError:
        return False
    return state != "Z"


def until_gone(pids: list[int]) -> None:
    end = time.monotonic() + LONG
    while any(alive(pid) for pid in pids):
        assert time.monotonic() < end
        time.sleep(0.02)


def test_every_task_is_done_once_by_workers_that_live_on() -> None:
    with pool() as engine:
        for k in range(20):
            engine.submit(task(str(k), seconds=0.02))
        found = all_done(engine, 20)
        replies = [done.reply for done in found.values() if done.reply is not None]
        assert 20 == len(replies)
        assert set(engine.pids) == {reply["pid"] for reply in replies}
        assert 2 == len(engine.pids)


def test_no_more_workers_are_started_than_there_are_tasks() -> None:
    with pool(8) as engine:
        engine.submit(task("only"))
        all_done(engine, 1)
        assert 1 == len(engine.pids)


def test_room_is_for_two_waiting_tasks_a_worker() -> None:
    with pool(2) as engine:
        assert 4 == engine.room()
        for k in range(4):
            engine.submit(task(str(k)))
        assert 0 == engine.room()
        all_done(engine, 4)
        assert (4, 0) == (engine.room(), engine.under_way())


def test_the_task_of_a_worker_that_dies_is_given_again(tmp_path: Path) -> None:
    log = tmp_path / "log"
    with pool() as engine:
        engine.submit(task("a", "die once", mark=str(tmp_path / "mark"), log=str(log)))
        engine.submit(task("b", seconds=0.3, log=str(log)))
        found = all_done(engine, 2)
    assert all(done.reply is not None for done in found.values())
    assert ["a", "a", "b"] == sorted(line.split()[0] for line in log.read_text().splitlines())


@pytest.mark.parametrize(
    ("content", "told"),
    [
        ({"do": "die", "signal": "SIGKILL"}, "was killed (SIGKILL), as the system does where"),
        ({"do": "die", "signal": "SIGSEGV"}, "crashed (SIGSEGV"),
        ({"do": "die", "signal": "SIGUSR1"}, "was ended by a signal (SIGUSR1)"),
        ({"do": "leave", "code": 7}, "ended by itself with exit code 7"),
        ({"do": "garble", "text": "what?"}, "answered with what is no answer: 'what?'"),
        ({"do": "garble", "text": '{"key": "other"}'}, "no answer: {'key': 'other'}"),
        ({"do": "garble", "text": "[1, 2]"}, "answered with what is no answer: [1, 2]"),
    ],
)
def test_a_task_that_kills_its_workers_fails_in_words_and_the_others_are_done(
    content: dict[str, Any], told: str, tmp_path: Path
) -> None:
    log = tmp_path / "log"
    with pool() as engine:
        engine.submit(Task("bad", {**content, "log": str(log)}))
        for k in range(6):
            engine.submit(task(str(k), seconds=0.05))
        found = all_done(engine, 7)
    bad = found.pop("bad")
    assert bad.reply is None
    assert bad.reason.startswith("The process that computed it was lost 3 times; the last time it")
    assert told in bad.reason
    assert 3 == len(log.read_text().splitlines())
    assert all(done.reply is not None for done in found.values())


def test_the_last_words_of_a_worker_are_told() -> None:
    with pool(1, tries=1) as engine:
        engine.submit(task("a", "die", signal="SIGABRT"))
        reason = all_done(engine, 1)["a"].reason
    assert (
        "The process that computed it was lost: it gave up (SIGABRT); its last words: "
        '"something went wrong".'
    ) == reason


def test_a_worker_killed_while_it_waits_is_replaced() -> None:
    with pool(1) as engine:
        engine.submit(task("a"))
        all_done(engine, 1)
        (pid,) = engine.pids
        os.kill(pid, signal.SIGKILL)
        until_gone([pid])
        engine.submit(task("b"))
        assert all_done(engine, 1)["b"].reply is not None
        assert pid not in engine.pids


def test_nothing_printed_spoils_what_is_said_and_long_lines_pass() -> None:
    with pool(1) as engine:
        engine.submit(task("a", "chat", text="ä\n" * 200_000))
        done = all_done(engine, 1)["a"]
    assert done.reply is not None
    assert 400_000 == done.reply["length"]


def test_workers_that_cannot_live_are_not_started_for_ever() -> None:
    with pool(2, "--stillborn") as engine:
        for k in range(9):
            engine.submit(task(str(k)))
        with pytest.raises(EngineError) as told:
            all_done(engine, 9)
    assert (
        "3 worker processes in a row were gone before they could work; the last one ended by "
        'itself with exit code 3; its last words: "no such thing as a life".'
    ) == str(told.value)


def test_a_command_that_is_none_is_told() -> None:
    with Pool(1, ["/no/such/program"], dict(os.environ)) as engine:
        with pytest.raises(EngineError, match="cannot be started \\(No such file"):
            engine.submit(task("a"))
        assert [] == engine.pids


def test_tasks_not_begun_are_forgotten_at_a_stop_and_those_under_way_come_back() -> None:
    with pool(2) as engine:
        for k in range(6):
            engine.submit(task(str(k), seconds=5.0))
        while engine.under_way() < 2:
            engine.next(0.01)
        engine.stop()
        found = []
        while engine.under_way():
            done = engine.next(0.2)
            found += [done] if done is not None else []
        assert ["0", "1"] == sorted(done.key for done in found)
        # this worker knows no order to stop: it is gone, and not begun again
        assert all("SIGTERM" in done.reason for done in found)
        with pytest.raises(ValueError, match="takes no tasks"):
            engine.submit(task("late"))


def test_a_worker_that_does_not_heed_is_killed_when_the_pool_closes(tmp_path: Path) -> None:
    mark = tmp_path / "mark"
    with pool(1, grace=0.5) as engine:
        engine.submit(task("a", "hang", mark=str(mark)))
        while not mark.exists():
            engine.next(0.05)
        pids = engine.pids
        began = time.monotonic()
    assert 0.4 < time.monotonic() - began < 10.0
    assert [False] == [alive(pid) for pid in pids]


def test_nothing_is_left_open_when_a_pool_closes() -> None:
    before = len(list(Path("/proc/self/fd").iterdir()))
    with pool(3) as engine:
        for k in range(6):
            engine.submit(task(str(k), seconds=0.1))
        all_done(engine, 6)
        pids = engine.pids
    assert before == len(list(Path("/proc/self/fd").iterdir()))
    assert [False] * 3 == [alive(pid) for pid in pids]


DRIVER = """\
import os, sys, time
from driftwell.study.engine import Task
from driftwell.study.pool import Pool

engine = Pool(2, sys.argv[1:], dict(os.environ))
for k in range(2):
    engine.submit(Task(str(k), {"do": "work", "seconds": 1.0}))
while engine.under_way() < 2:
    engine.next(0.01)
print(*engine.pids, flush=True)
time.sleep(600)
"""


def test_workers_end_when_their_driver_is_killed() -> None:
    driver = subprocess.Popen(
        [sys.executable, "-c", DRIVER, *STRANGE],
        stdout=subprocess.PIPE,
        text=True,
        env=worker_environment(1),
    )
    assert driver.stdout is not None
    pids = [int(word) for word in driver.stdout.readline().split()]
    assert [True, True] == [alive(pid) for pid in pids]
    driver.kill()
    driver.communicate()
    until_gone(pids)


def test_a_worker_finds_the_package_and_keeps_to_its_threads() -> None:
    environment = worker_environment(3)
    code = (
        "import os, driftwell; "
        "print(driftwell.__file__, os.environ['NUMBA_NUM_THREADS'], os.environ['OMP_NUM_THREADS'])"
    )
    done = subprocess.run(
        [sys.executable, "-P", "-c", code],
        env=environment,
        capture_output=True,
        text=True,
        check=True,
        cwd="/",
    )
    import driftwell

    assert f"{driftwell.__file__} 3 3\n" == done.stdout
