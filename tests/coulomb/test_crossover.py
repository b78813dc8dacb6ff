"""From how many charges on the tree is taken: measured once, kept, and measured anew when due."""

from __future__ import annotations

import json
from dataclasses import replace
from pathlib import Path

import pytest

from driftwell.coulomb import crossover as module
from driftwell.coulomb.crossover import LEAST, Contest, crossover, timed
from driftwell.coulomb.tree import settings_for

CONTEST = Contest(settings_for(1e-4), False, True, False, 1)


@pytest.fixture
def cache(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """The cache folder of the test."""
    monkeypatch.setattr(module, "kept_in", lambda: tmp_path)
    return tmp_path


@pytest.fixture
def timings(monkeypatch: pytest.MonkeyPatch) -> list[Contest]:
    """Every contest that is timed; each comes out as 5000 and its place."""
    held: list[Contest] = []

    def told(contest: Contest) -> int:
        held.append(contest)
        return 5000 + len(held)

    monkeypatch.setattr(module, "timed", told)
    return held


def clocked(
    monkeypatch: pytest.MonkeyPatch, direct: float, tree: float, overhead: float = 0.0
) -> None:
    """A machine on which a pair, and a charge of the tree, take so many seconds."""
    monkeypatch.setattr(module, "_direct_seconds", lambda contest: direct * module._DIRECT**2)
    monkeypatch.setattr(module, "_tree_seconds", lambda contest, n: overhead + tree * n)


@pytest.mark.parametrize("pairs", [2600, 9000, 40_000])
def test_the_crossover_is_where_both_take_as_long(
    pairs: int, monkeypatch: pytest.MonkeyPatch
) -> None:
    clocked(monkeypatch, 1e-9, 1e-9 * pairs)
    assert pairs == pytest.approx(timed(CONTEST), rel=0.05, abs=0.0)


def test_a_start_that_takes_its_time_moves_the_crossover_up(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    """1e-9 n^2 = 1e-2 + 1e-6 n has its root at 3702."""
    clocked(monkeypatch, 1e-9, 1e-6, 1e-2)
    assert 3702 == pytest.approx(timed(CONTEST), rel=0.08, abs=0.0)


def test_a_tree_that_always_wins_is_taken_from_the_least_number_on(
    monkeypatch: pytest.MonkeyPatch,
) -> None:
    clocked(monkeypatch, 1e-9, 1e-8)
    assert LEAST == timed(CONTEST)


def test_a_slow_machine_is_not_kept_waiting(monkeypatch: pytest.MonkeyPatch) -> None:
    """Once the time is up, what was seen last is carried on."""
    asked = []

    def slow(contest: Contest, n: int) -> float:
        asked.append(n)
        return 1e-9 * 3e5 * n

    monkeypatch.setattr(module, "_direct_seconds", lambda contest: 1e-9 * module._DIRECT**2)
    monkeypatch.setattr(module, "_tree_seconds", slow)
    monkeypatch.setattr(module, "_SECONDS", -1.0)
    assert 3e5 == pytest.approx(timed(CONTEST), rel=0.05, abs=0.0)
    assert 1 == len(asked)


def test_what_was_timed_is_kept_and_read_again(cache: Path, timings: list[Contest]) -> None:
    assert [5001, 5001] == [crossover(CONTEST), crossover(CONTEST)]
    assert [CONTEST] == timings
    assert [5001] == list(json.loads((cache / "crossover.json").read_text()).values())
    assert ["crossover.json"] == [file.name for file in cache.iterdir()]


@pytest.mark.parametrize(
    "change",
    [
        {"threads": 2},
        {"softened": True},
        {"tree_mixed": False},
        {"direct_mixed": True},
        {"settings": settings_for(1e-6)},
    ],
)
def test_another_contest_is_timed_anew(
    cache: Path, timings: list[Contest], change: dict[str, object]
) -> None:
    other = replace(CONTEST, **change)
    assert [5001, 5002, 5001] == [crossover(each) for each in (CONTEST, other, CONTEST)]
    assert [CONTEST, other] == timings


def test_another_processor_is_timed_anew(
    cache: Path, timings: list[Contest], monkeypatch: pytest.MonkeyPatch
) -> None:
    crossover(CONTEST)
    monkeypatch.setattr(module, "processor", lambda: "another one")
    assert 5002 == crossover(CONTEST)


@pytest.mark.parametrize(
    "text",
    [
        "",
        "{",
        "[]",
        "3",
        "null",
        '{"%s": "5000"}',
        '{"%s": true}',
        '{"%s": 3}',
        '{"%s": 1e9}',
        "[" * 9999,
    ],
)
def test_a_file_that_cannot_be_read_is_no_error(
    cache: Path, timings: list[Contest], text: str
) -> None:
    (cache / "crossover.json").write_text(text.replace("%s", CONTEST.key()))
    assert 5001 == crossover(CONTEST)
    assert 5001 == crossover(CONTEST)
    assert 1 == len(timings)


def test_a_folder_that_cannot_be_written_is_no_error(
    tmp_path: Path, timings: list[Contest], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(module, "kept_in", lambda: tmp_path / "not" / "there")
    assert [5001, 5002] == [crossover(CONTEST), crossover(CONTEST)]
    (tmp_path / "crossover.json").mkdir()
    monkeypatch.setattr(module, "kept_in", lambda: tmp_path)
    assert 5003 == crossover(CONTEST)
    assert ["crossover.json"] == [file.name for file in tmp_path.iterdir()]


def test_both_sums_are_really_timed() -> None:
    """On this machine; no bound on what comes out but that it is one, and soon."""
    assert LEAST <= timed(CONTEST) <= 10_000_000
