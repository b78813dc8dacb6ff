"""The engine of a cluster tries again what a cluster loses, and hands each run over once."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Any

import pytest

from driftwell.study import cluster_engine as engine_module
from driftwell.study.cluster_engine import ClusterEngine, ClusterLostError
from driftwell.study.cluster_task import leave, stop
from driftwell.study.engine import EngineError, Task
from tests.study.small_sweeps import ended

Said = dict[str, Any] | Exception


@dataclass
class Result:
    """A future that is done."""

    said: Said
    status: str = "finished"
    released: bool = False

    def add_done_callback(self, heard: Callable[[Any], None]) -> None:
        heard(self)

    def result(self, timeout: float) -> tuple[dict[str, Any], str]:
        if isinstance(self.said, Exception):
            raise self.said
        return {"busy": False, **self.said}, ""

    def release(self) -> None:
        self.released = True


@dataclass
class Client:
    """A cluster of two threads that answers each task at once, with what comes next."""

    says: list[Said]
    status: str = "running"
    threads: int = 2
    given: list[tuple[str, Any]] = field(default_factory=list)
    futures: list[Result] = field(default_factory=list)
    told: list[Any] = field(default_factory=list)

    def nthreads(self) -> dict[str, int]:
        return {"worker": self.threads} if self.threads else {}

    def submit(
        self, function: Any, sweep: str, name: str, content: Any, version: str, key: str, pure: bool
    ) -> Result:
        assert name == key
        assert not pure
        self.given.append((key, content))
        self.futures.append(Result(self.says.pop(0)))
        return self.futures[-1]

    def run(self, function: Any, *_: str, on_error: str) -> None:
        self.told.append(function)

    def close(self, timeout: float) -> None:
        self.status = "closed"


def task(key: str = "a", fresh: bool = False) -> Task:
    return Task(key, {"scenario": "s.toml", "folder": "f", "threads": 1, "fresh": fresh})


def test_a_run_is_handed_over_once_and_its_result_let_go_of() -> None:
    client = Client([ended("finished")])
    engine = ClusterEngine(client, "tcp://h:1", None)
    assert 4 == engine.room()
    engine.submit(task())
    assert (3, 1) == (engine.room(), engine.under_way())
    done = engine.next(1.0)
    assert done is not None
    assert done.reply is not None
    assert ("a", "finished") == (done.key, done.reply["word"])
    assert engine.next(0.0) is None
    assert 0 == engine.under_way()
    assert client.futures[0].released
    assert client.given[0][1]["folder"].startswith("/")


def test_what_the_cluster_loses_is_given_again_under_another_name_until_it_is_given_up() -> None:
    lost = RuntimeError("all those workers died\nand more")
    client = Client([lost, lost, ended("finished"), lost, lost, lost])
    engine = ClusterEngine(client, "tcp://h:1", None, tries=3)
    engine.submit(task())
    done = engine.next(1.0)
    assert done is not None
    assert done.reply is not None
    engine.submit(task("b"))
    done = engine.next(1.0)
    assert done is not None
    assert done.reply is None
    text = "The cluster gave it up 3 times; the last time: RuntimeError: all those workers died"
    assert text == done.reason
    assert 6 == len({name for name, _ in client.given})
    assert all(future.released for future in client.futures)


def test_a_run_that_a_batch_system_stops_goes_on_and_is_not_started_over() -> None:
    client = Client([ended("stopped"), ended("finished")])
    engine = ClusterEngine(client, "tcp://h:1", None)
    engine.submit(task(fresh=True))
    done = engine.next(1.0)
    assert done is not None
    assert done.reply is not None
    assert "finished" == done.reply["word"]
    assert [True, False] == [content["fresh"] for _, content in client.given]


def test_a_folder_in_use_is_tried_again_after_a_while(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(engine_module, "_BUSY_PAUSE", 0.1)
    monkeypatch.setattr(engine_module, "_LOOK", 0.05)
    busy = {**ended("broken off", "in use"), "busy": True}
    client = Client([busy, busy, ended("finished"), busy, busy])
    engine = ClusterEngine(client, "tcp://h:1", None, tries=1)
    engine.submit(task())
    assert engine.next(0.0) is None
    done = engine.next(5.0)
    assert done is not None
    assert done.reply is not None
    assert "finished" == done.reply["word"]
    monkeypatch.setattr(engine_module, "_BUSY_PATIENCE", 0.05)
    engine.submit(task("b"))
    done = engine.next(5.0)
    assert done is not None
    assert done.reply is not None
    assert "in use" == done.reply["sentence"]
    assert 5 == len({name for name, _ in client.given})  # a name in use twice confuses a cluster


def test_a_scheduler_that_is_gone_is_an_error_of_its_own() -> None:
    client = Client([ended("finished")])
    engine = ClusterEngine(client, "tcp://h:1", None)
    engine.submit(task())
    client.status = "connecting"
    with pytest.raises(ClusterLostError, match=r"tcp://h:1: the scheduler is gone"):
        engine.next(0.0)
    with pytest.raises(ClusterLostError):
        engine.room()
    engine.close()
    assert [] == client.told
    client = Client([ended("finished")])
    engine = ClusterEngine(client, "tcp://h:1", None)
    engine.submit(task())
    client.futures[0].status = "cancelled"  # forgotten, and back again
    with pytest.raises(ClusterLostError):
        engine.next(1.0)


def test_a_worker_that_can_compute_nothing_ends_the_sweep() -> None:
    for said, match in (
        (EngineError("h: has driftwell 0.0.1"), "has driftwell 0.0.1"),
        (ModuleNotFoundError("No module named 'driftwell'"), "cannot load driftwell"),
    ):
        engine = ClusterEngine(Client([said]), "tcp://h:1", None)
        engine.submit(task())
        with pytest.raises(EngineError, match=match):
            engine.next(1.0)


def test_a_stop_tells_the_workers_and_forgets_all_where_there_are_none() -> None:
    client = Client([ended("stopped"), ended("finished")])
    engine = ClusterEngine(client, "tcp://h:1", 1)
    engine.submit(task())
    engine.stop()
    assert [stop] == client.told
    done = engine.next(1.0)
    assert done is not None
    assert done.reply is not None
    assert "stopped" == done.reply["word"]
    assert 0 == engine.under_way()
    engine.close()
    engine.close()
    assert ([stop, leave], "closed") == (client.told, client.status)
    client = Client([ended("finished")], threads=0)
    engine = ClusterEngine(client, "tcp://h:1", None)
    assert 1 == engine.room()
    engine.submit(task())
    assert 0 == engine.room()
    engine.stop()
    assert 1 == engine.under_way()
    done = engine.next(0.0)
    assert done is not None
    assert done.reply is None
    assert engine.next(0.1) is None
    with pytest.raises(ValueError, match="takes no tasks"):
        engine.submit(task("b"))
