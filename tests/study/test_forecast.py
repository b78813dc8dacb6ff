"""What a sweep will cost, from a few of its runs."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from driftwell.cli.main import main
from driftwell.estimate import Estimate
from driftwell.scenario.read import LoadedScenario
from driftwell.study import forecast as module
from driftwell.study.forecast import BESIDES, TIMED, forecast, outlook
from driftwell.timed_run import Stretch
from tests.study.small_study import study, study_file, vary

COUNTS = vary("cloud.load.count", "values = [10, 20, 40, 80, 160, 320]")
BLANK = Estimate(
    charges=0,
    threads=1,
    method="direct",
    because="",
    steps=1,
    records=1,
    snapshots=1,
    segments=1,
    seconds=0.0,
    least=0.0,
    most=0.0,
    parts={"the pair sum": 1.0},
    memory=1,
    disk=0,
    events=0,
    timed=Stretch(1, 1.0, 1.0, 1.0, 1, 1),
    ended=False,
    changes=(),
)


@pytest.fixture
def timed(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    """Charges of the runs that were timed: each takes its square in ms, and 1 kB a charge."""
    asked: list[int] = []

    def estimate(loaded: LoadedScenario, threads: int, seconds: float) -> Estimate:
        count = int(loaded.scenario.cloud[0].count or 0)
        asked.append(count)
        took = 1e-3 * count**2
        return replace(
            BLANK,
            charges=count,
            threads=threads,
            seconds=took,
            least=0.5 * took,
            most=2.0 * took,
            disk=1000 * count,
        )

    monkeypatch.setattr(module, "estimate", estimate)
    return asked


def test_runs_between_those_timed_follow_their_power_law(tmp_path: Path, timed: list[int]) -> None:
    """Five of six are timed; the one between costs as its square on logarithmic scales."""
    found = forecast(study(tmp_path, COUNTS), workers=2, threads=1)
    counts = [10, 20, 40, 80, 160, 320]
    assert TIMED == len(timed)
    assert {10, 320} < set(timed) < set(counts)
    work = sum(BESIDES + 1e-3 * count**2 for count in counts)
    assert work == pytest.approx(found.work, rel=1e-12)
    assert BESIDES + 102.4 == pytest.approx(found.longest, rel=1e-12)
    assert found.longest == found.seconds  # longer than half of the work
    assert found.least < 0.6 * found.seconds
    assert found.most > 1.9 * found.seconds - 1.0
    assert sum(1000 * count for count in counts) == pytest.approx(found.disk, abs=1)


def test_many_equal_runs_take_their_share_of_the_cores(tmp_path: Path, timed: list[int]) -> None:
    """Sizes are equal where charges and duration do not vary: the mean of those timed."""
    volts = vary("field.rods.voltage.amplitude", 'from = "100 V"\nto = "200 V"\npoints = 10')
    found = forecast(study(tmp_path, volts), workers=2, threads=1)
    assert 10 == found.runs == found.cases
    assert 10 * (BESIDES + 0.4) == pytest.approx(found.work)
    assert 0.5 * found.work == pytest.approx(found.seconds)


def test_the_command_knows_a_study_from_a_scenario(
    tmp_path: Path, timed: list[int], capsys: Any
) -> None:
    assert 0 == main(["estimate", str(study_file(tmp_path, COUNTS)), "--measure"])
    printed = capsys.readouterr()
    heads = [line[:9].strip() for line in printed.out.splitlines()]
    assert ["time", "runs", "cores", "timed", "memory", "disk"] == [h for h in heads if h]
    assert "6 of 6 cases" in printed.out
    assert printed.err.startswith("How wide\n6 cases; some of them are timed\n")


def test_a_study_is_counted_without_timing_any_of_its_runs(
    tmp_path: Path, timed: list[int], capsys: Any
) -> None:
    assert 0 == main(["estimate", str(study_file(tmp_path, COUNTS))])
    printed = capsys.readouterr()
    assert [] == timed
    counted, _, by_hand = printed.out.partition("\nOf case 6, the largest:\n")
    heads = [line[:9].strip() for line in counted.splitlines()]
    assert ["runs", "charges", "cores", "memory", "time"] == [head for head in heads if head]
    assert "runs     6 of 6 cases\ncharges  10 to 320\n" in counted
    assert by_hand.startswith("By hand, of the scenario as it begins:\n")
    assert "nothing is timed, --measure times some of them" in printed.err


def test_of_many_cases_some_are_looked_at(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(module, "LOOKED_AT", 4)
    found = outlook(study(tmp_path, COUNTS))
    assert (6, 4, 4) == (found.cases, found.looked_at, found.runs)
    assert (10, 320) == found.charges
    assert 6 == found.case


def test_a_study_with_faults_is_told(tmp_path: Path, capsys: Any) -> None:
    path = study_file(tmp_path, vary("cloud.load.count", "values = []"))
    assert 2 == main(["estimate", str(path)])
    assert "wide.toml:" in capsys.readouterr().err


def test_a_real_study_is_timed(tmp_path: Path) -> None:
    """The whole way, with runs that are carried out."""
    text = vary("cloud.load.count", "values = [10, 40]")
    found = forecast(study(tmp_path, text), seconds=0.4, workers=2, threads=1)
    assert [10, 40] == [each.charges for each in found.timed]
    assert 0.0 < found.least <= found.seconds <= found.most
    assert found.disk > 2 * 10_000
    assert found.memory > 2 * 400_000_000
