"""The morning summary: what ran, what failed and why, what it says."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

import pytest

from driftwell.answers.answer import Answer
from driftwell.study.cores import Sharing
from driftwell.study.progress import Failure, SweepProgress, SweepResult
from driftwell.study.summary import MOST_ROWS, in_words, summary
from tests.study.small_sweeps import Point, Points, Varied


def size(value: float, error: float | None = 1e-6) -> Answer:
    return Answer("size x", "rms-size", value, "m", error, "a note")


def held(value: float) -> Answer:
    return Answer("held", "fraction-left", value, "1", 0.01, "")


def study_of(values: Sequence[tuple[float | str, ...]], *axes: Varied) -> Points:
    cases = tuple(
        Point(k, (f"cloud.load.count={each[0]}",), tuple(each)) for k, each in enumerate(values, 1)
    )
    return Points(Path("s.toml"), cases, axes, "How many ions are too many")


def result_of(
    answers: dict[int, tuple[Answer, ...]],
    cases: int,
    failures: tuple[Failure, ...] = (),
    stopped: bool = False,
    there: int = 0,
) -> SweepResult:
    computed = len(answers) - there
    return SweepResult(
        Path("sweep"),
        SweepProgress(cases, there, computed, len(failures), 0, 200.0),
        failures,
        {number: f"digest {number}" for number in range(1, cases + 1)},
        {f"digest {number}": found for number, found in answers.items()},
        stopped,
        Sharing(2, 1, "2 runs side by side on 1 thread each: so it is") if computed else None,
        390.0,
    )


def test_a_small_sweep_is_a_table_over_what_was_varied() -> None:
    study = study_of(
        [(400.0, 1e-4), (400.0, 2e-4), (4000.0, 1e-4)],
        Varied("cloud.load.count"),
        Varied("duration", "s"),
    )
    found = result_of(
        {1: (held(1.0), size(8.27e-5)), 2: (held(0.9), size(8.3e-5)), 3: (held(0.5), size(2e-4))},
        3,
    )
    assert [
        "How many ions are too many",
        "3 runs: 3 computed now",
        "took 3 min 20 s by the clock for 6 min 30 s of runs; 2 runs side by side on 1 thread "
        "each: so it is",
        "",
        "what it says",
        "  cloud.load.count  duration           held          size x",
        "               400    100 us  1.000 ± 0.010   82.7 ± 1.0 um",
        "               400    200 us  0.900 ± 0.010   83.0 ± 1.0 um",
        "              4000    100 us  0.500 ± 0.010  200.0 ± 1.0 um",
    ] == summary(study, found, 110)


def test_what_is_not_there_leaves_its_place_in_the_table_empty() -> None:
    study = study_of([(400.0,), (4000.0,)], Varied("cloud.load.count"))
    lines = summary(study, result_of({1: (held(1.0), size(1e-4)), 2: (size(2e-4),)}, 2), 100)
    assert [
        "  cloud.load.count           held          size x",
        "               400  1.000 ± 0.010  100.0 ± 1.0 um",
        "              4000                 200.0 ± 1.0 um",
    ] == lines[-3:]


def test_runs_that_differ_by_chance_are_taken_together() -> None:
    study = study_of([(400.0,)] * 3, Varied("cloud.load.count"))
    found = result_of({1: (size(1.0),), 2: (size(2.0),), 3: (size(3.0),)}, 3)
    lines = summary(study, found, 100)
    # mean 2, scatter 1: error 1/sqrt(3)
    assert "400  2.00 ± 0.58 m" in lines[-1]
    assert any("mean and its error" in line for line in lines)


def test_a_large_sweep_is_told_by_its_least_and_largest_values() -> None:
    values = [(float(k),) for k in range(1, MOST_ROWS + 2)]
    study = study_of(values, Varied("duration", "s"))
    answers = {k: (size(1e-3 * abs(k - 7) + 1e-3),) for k in range(1, MOST_ROWS + 2)}
    answers[9] = (size(float("nan")),)
    lines = summary(study, result_of(answers, len(values)), 200)
    assert (
        "  size x: from 1.0000 ± 0.0010 mm (duration = 7 s) to 35.0000 ± 0.0010 mm "
        "(duration = 41 s), 40 points; at 1 points it has no value"
    ) == lines[-1]


def test_failures_of_one_reason_are_told_together() -> None:
    study = study_of([(float(k),) for k in range(1, 7)], Varied("cloud.load.count"))
    ran_away = "after {} steps: charge {} has run away."
    failures = (
        *(Failure(k, (), ran_away.format(10 * k, k)) for k in (1, 2, 4)),
        Failure(5, (), "The disk is full.", before=True),
    )
    lines = summary(study, result_of({3: (held(1.0),)}, 6, failures, stopped=True), 100)
    start = lines.index("failed")
    assert [
        "6 runs: 1 computed now, 4 failed, 1 left",
        "Stopped on request; the same command goes on.",
    ] == lines[1:3]
    assert [
        "  3 runs, such as number 1 (cloud.load.count = 1): after 10 steps: charge 1 has run away.",
        "  1 run, number 5 (cloud.load.count = 5): The disk is full.",
        "  1 run of these failed in an earlier sweep and would fail again; --retry-failed starts "
        "them over.",
    ] == lines[start + 1 : start + 4]


def test_a_sweep_with_nothing_to_do_says_so() -> None:
    study = study_of([(1.0,), (2.0,)], Varied("cloud.load.count"))
    lines = summary(study, result_of({1: (held(1.0),), 2: (held(1.0),)}, 2, there=2), 100)
    assert "2 runs: 2 there already" == lines[1]
    assert "what it says" in lines
    assert not any(line.startswith("took") for line in lines)


@pytest.mark.parametrize(
    ("seconds", "told"),
    [(0.04, "0.0 s"), (4.24, "4.2 s"), (200.0, "3 min 20 s"), (25_920.0, "7 h 12 min")],
)
def test_times_are_told_as_people_say_them(seconds: float, told: str) -> None:
    assert told == in_words(seconds)
