"""The catalogue knows every run by its digest, and outlives kills and full disks."""

from __future__ import annotations

import hashlib
import math
import os
import signal
import sqlite3
import subprocess
import sys
import time
from collections.abc import Iterator
from pathlib import Path

import pytest

from driftwell.errors import RecordError
from driftwell.study.catalogue import CATALOGUE_VERSION, Catalogue
from tests.study.small_study import answer

KILLS = 8


def digest(number: int) -> str:
    return hashlib.sha256(str(number).encode()).hexdigest()


@pytest.fixture
def catalogue(tmp_path: Path) -> Iterator[Catalogue]:
    with Catalogue(tmp_path / "catalogue.sqlite") as found:
        yield found


def test_a_run_waits_runs_and_ends_with_its_answers(catalogue: Catalogue) -> None:
    one = digest(1)
    catalogue.add(one, 1, ["cloud.load.count=5", "title=a, b"])
    row = catalogue.find(one)
    assert row is not None
    assert (1, one, ("cloud.load.count=5", "title=a, b")) == (row.number, row.digest, row.settings)
    assert ("waiting", "", None, 0, ()) == (
        *(row.word, row.sentence, row.wall_time, row.starts, row.answers),
    )
    catalogue.began(one)
    row = catalogue.find(one)
    assert row is not None
    assert ("running", 1) == (row.word, row.starts)
    answers = (answer(1.5), answer(2.5, None, "held", "1"))
    catalogue.ended(one, "finished", "It came to its end.", 1.25, answers)
    row = catalogue.find(one)
    assert row is not None
    assert ("finished", "It came to its end.", 1.25) == (row.word, row.sentence, row.wall_time)
    assert answers == row.answers
    assert (row,) == catalogue.rows()


def test_a_run_that_is_begun_again_keeps_count_and_loses_how_it_ended(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    catalogue.began(digest(1))
    catalogue.ended(digest(1), "stopped", "On request.", 2.0)
    catalogue.began(digest(1))
    row = catalogue.find(digest(1))
    assert row is not None
    assert ("running", "", None, 2) == (row.word, row.sentence, row.wall_time, row.starts)


def test_what_a_run_answers_later_takes_the_place_of_what_it_answered(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    catalogue.ended(digest(1), "stopped", "", 1.0, [answer(1.0), answer(2.0, name="other")])
    catalogue.ended(digest(1), "finished", "", 2.0, [answer(3.0)])
    assert (answer(3.0),) == catalogue.rows()[0].answers


def test_an_answer_that_is_no_number_stays_none(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    catalogue.ended(digest(1), "finished", "", 1.0, [answer(math.nan, None)])
    found = catalogue.rows()[0].answers[0]
    assert math.isnan(found.value)
    assert found.error is None


def test_cases_are_counted_by_how_they_ended(catalogue: Catalogue) -> None:
    catalogue.add_all((digest(k), k + 1, []) for k in range(5))
    catalogue.began(digest(0))
    catalogue.ended(digest(1), "failed", "Runaway.", 1.0)
    catalogue.ended(digest(2), "failed", "Runaway.", 1.0)
    assert {"waiting": 2, "running": 1, "failed": 2} == catalogue.counts()


def test_two_cases_of_the_same_content_are_one_run(catalogue: Catalogue) -> None:
    catalogue.add_all([(digest(1), 1, ["a=1"]), (digest(1), 2, ["a=1.0"])])
    catalogue.ended(digest(1), "finished", "", 1.0, [answer(1.0)])
    assert ["finished"] * 2 == [row.word for row in catalogue.rows()]
    assert {"finished": 2} == catalogue.counts()


def test_a_study_that_changed_finds_its_runs_by_content(catalogue: Catalogue) -> None:
    catalogue.add_all((digest(k), k + 1, []) for k in range(4))
    catalogue.ended(digest(3), "finished", "", 1.0, [answer(1.0)])
    catalogue.add_all([(digest(9), 1, []), (digest(3), 2, ["b=2"])])
    assert [(1, "waiting"), (2, "finished")] == [(row.number, row.word) for row in catalogue.rows()]
    assert catalogue.find(digest(0)) is None
    catalogue.add_all([(digest(0), 1, [])])
    assert ["waiting"] == [row.word for row in catalogue.rows()]


def test_adding_what_is_known_changes_nothing_of_its_run(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    catalogue.ended(digest(1), "finished", "", 1.0, [answer(1.0)])
    before = catalogue.rows()
    catalogue.add(digest(1), 1, [])
    assert before == catalogue.rows()


def test_a_run_that_was_never_added_cannot_begin_or_end(catalogue: Catalogue) -> None:
    with pytest.raises(RecordError, match="knows no run with the digest"):
        catalogue.began(digest(1))
    with pytest.raises(RecordError, match="knows no run with the digest"):
        catalogue.ended(digest(1), "finished", "", 1.0)


def test_what_fails_half_way_changes_nothing(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])

    def broken() -> Iterator[tuple[str, int, list[str]]]:
        yield digest(2), 1, []
        raise KeyError

    with pytest.raises(KeyError):
        catalogue.add_all(broken())
    assert [digest(1)] == [row.digest for row in catalogue.rows()]


def test_a_closed_catalogue_is_one_file_and_is_found_again(tmp_path: Path) -> None:
    path = tmp_path / "ein Katalog, größer.sqlite"
    with Catalogue(path) as catalogue:
        catalogue.add(digest(1), 1, ["title=ä"])
    assert [path.name] == [entry.name for entry in tmp_path.iterdir()]
    with Catalogue(path, read_only=True) as catalogue:
        assert ("title=ä",) == catalogue.rows()[0].settings
    assert [path.name] == [entry.name for entry in tmp_path.iterdir()]


def test_others_may_read_while_it_is_written(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    with Catalogue(catalogue.path, read_only=True) as other:
        catalogue.began(digest(1))
        assert {"running": 1} == other.counts()
        with pytest.raises(RecordError):
            other.began(digest(1))
        catalogue.ended(digest(1), "finished", "", 1.0)
        assert {"finished": 1} == other.counts()


def test_a_second_writer_in_the_middle_of_a_change_is_told(
    catalogue: Catalogue, monkeypatch: pytest.MonkeyPatch
) -> None:
    catalogue.add(digest(1), 1, [])
    monkeypatch.setattr("driftwell.study.catalogue._PATIENCE", 0.1)
    second = sqlite3.connect(catalogue.path, isolation_level=None)
    second.execute("BEGIN IMMEDIATE")
    with Catalogue(catalogue.path) as third, pytest.raises(RecordError, match="another process"):
        third.began(digest(1))
    second.execute("ROLLBACK")
    second.close()
    catalogue.began(digest(1))


def test_only_a_catalogue_is_taken_for_one(tmp_path: Path) -> None:
    path = tmp_path / "other.sqlite"
    other = sqlite3.connect(path)
    other.execute("CREATE TABLE letters (text)")
    other.commit()
    other.close()
    before = path.read_bytes()
    with pytest.raises(RecordError, match="is not the catalogue of a sweep"):
        Catalogue(path)
    assert before == path.read_bytes()
    path.write_bytes(b"not a database, by far" * 100)
    with pytest.raises(RecordError, match="is damaged or not a catalogue"):
        Catalogue(path)
    with pytest.raises(RecordError):
        Catalogue(tmp_path / "none.sqlite", read_only=True)
    assert not (tmp_path / "none.sqlite").exists()
    with pytest.raises(RecordError, match="cannot be used"):
        Catalogue(tmp_path / "no folder" / "catalogue.sqlite")


def test_a_newer_version_is_refused(catalogue: Catalogue) -> None:
    newer = sqlite3.connect(catalogue.path)
    newer.execute(f"PRAGMA user_version = {CATALOGUE_VERSION + 1}")
    newer.close()
    with pytest.raises(RecordError, match=f"is of version {CATALOGUE_VERSION + 1}"):
        Catalogue(catalogue.path)


def test_a_full_disk_is_told_and_leaves_what_was_there(catalogue: Catalogue) -> None:
    catalogue.add(digest(1), 1, [])
    pages = catalogue._base.execute("PRAGMA page_count").fetchone()[0]
    catalogue._base.execute(f"PRAGMA max_page_count = {pages}")
    with pytest.raises(RecordError, match="the disk is full"):
        catalogue.add_all((digest(k), k + 1, ["x" * 100]) for k in range(500))
    assert [digest(1)] == [row.digest for row in catalogue.rows()]
    catalogue._base.execute("PRAGMA max_page_count = 1000000")
    catalogue.add_all((digest(k), k + 1, ["x" * 100]) for k in range(500))
    assert 500 == len(catalogue.rows())


WRITER = """\
import sys
from driftwell.answers.answer import Answer
from driftwell.study.catalogue import Catalogue

catalogue = Catalogue(sys.argv[1])
while True:
    for row in catalogue.rows():
        catalogue.began(row.digest)
        answers = [Answer("size", "rms-size", float(row.number), "m", None, "note " * 50)]
        catalogue.ended(row.digest, "finished", "done", 1.0, answers)
        print(row.digest, row.starts + 1, flush=True)
"""


def test_what_was_acknowledged_outlives_a_kill(tmp_path: Path) -> None:
    path = tmp_path / "catalogue.sqlite"
    with Catalogue(path) as catalogue:
        catalogue.add_all((digest(k), k + 1, [f"a={k}"]) for k in range(300))
    acknowledged: dict[str, int] = {}
    for kill in range(KILLS):
        writer = subprocess.Popen(
            [sys.executable, "-c", WRITER, str(path)], stdout=subprocess.PIPE, text=True
        )
        assert writer.stdout is not None
        lines = [writer.stdout.readline()]
        time.sleep(0.02 + 0.013 * kill)
        os.kill(writer.pid, signal.SIGKILL)
        lines += writer.stdout.readlines()
        writer.stdout.close()
        writer.wait()
        for line in lines:
            if line.endswith("\n") and len(line.split()) == 2:
                name, starts = line.split()
                acknowledged[name] = int(starts)
        with Catalogue(path, read_only=True) as catalogue:
            rows = {row.digest: row for row in catalogue.rows()}
        assert 300 == len(rows)
        for name, starts in acknowledged.items():
            assert rows[name].starts >= starts
            assert rows[name].word in ("finished", "running")
        for row in rows.values():
            if row.word == "finished":
                assert (float(row.number),) == tuple(each.value for each in row.answers)
    assert acknowledged[digest(0)] >= KILLS  # each writer got as far as this run at least
    base = sqlite3.connect(path)
    assert [("ok",)] == base.execute("PRAGMA integrity_check").fetchall()
    base.close()


def test_a_run_is_looked_up_without_passing_through_the_others(catalogue: Catalogue) -> None:
    """No time is asserted: the plan of the query is what makes it constant."""
    catalogue.add_all((digest(k), k + 1, []) for k in range(50))
    asked: list[str] = []
    catalogue._base.set_trace_callback(asked.append)
    assert catalogue.find(digest(3)) is not None
    catalogue._base.set_trace_callback(None)
    assert 2 == len(asked)
    for query in asked:
        plan = catalogue._base.execute(f"EXPLAIN QUERY PLAN {query}").fetchall()
        assert plan
        assert all(step[3].startswith(("SEARCH", "USE TEMP B-TREE")) for step in plan), plan
