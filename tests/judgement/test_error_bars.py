"""Error bars of whole runs cover what is true about as often as they should."""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

import pytest

sys.path.append(str(Path(__file__).parent.parent.parent / "tools"))

from error_bar_cases.cases import CASES, Case
from error_bars import LEAST, answered, covered, whole

from driftwell.answers.answer import Answer

SEEDS = 16
Runs = list[list[Answer]]


@pytest.fixture(scope="module")
def flight() -> tuple[Case, Runs]:
    """A thermal cloud in free flight, and what its runs say."""
    case = next(case for case in CASES if case.name == "flight")
    return case, answered(case, SEEDS)


def test_bars_of_independent_charges_cover_what_they_should(flight: tuple[Case, Runs]) -> None:
    """Of 112 answers 68 %, within three standard deviations of that count."""
    found = list(covered(*flight))
    assert {SEEDS} == {each.seeds for each in found}
    assert all(each.known for each in found)
    assert 0.54 < whole(found) < 0.82
    assert all(0.6 < each.scatter < 1.5 and abs(each.bias) < 0.8 for each in found)


def test_bars_half_as_wide_are_found_out(flight: tuple[Case, Runs]) -> None:
    """A bar of half a standard deviation covers 38 %."""
    case, runs = flight
    halved = [[replace(each, error=0.5 * float(each.error or 0.0)) for each in run] for run in runs]
    assert whole(list(covered(case, halved))) < LEAST
