"""Spoiled scenarios that can still be read are carried out: each ends with an outcome or a word."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.errors import ScenarioError
from driftwell.record.reader import open_run
from driftwell.scenario.read import LoadedScenario, read_scenario
from tests.faults.test_mutated_scenarios import _all_spoiled

RUNS = 60
STEPS = 40
OUTCOMES = {0: "finished", 3: "all lost", 5: "failed"}


def _read(folder: Path) -> Iterator[tuple[str, LoadedScenario]]:
    """The first spoiled scenarios that can be read, each with what was done to it."""
    path = folder / "spoiled.toml"
    found = 0
    for name, content in _all_spoiled():
        path.write_bytes(content)
        try:
            loaded = read_scenario(path)
        except ScenarioError:
            continue
        yield name, loaded
        found += 1
        if found == RUNS:
            return


def _short(loaded: LoadedScenario) -> list[str]:
    """Settings that keep a run short: few steps, few records, few charges."""
    scenario = loaded.scenario
    settings = [
        f"stepping.step={scenario.duration / STEPS!r} s",
        f"record.every={scenario.duration / 4.0!r} s",
    ]
    if scenario.record.snapshots is not None:
        settings.append(f"record.snapshots={scenario.duration / 2.0!r} s")
    for number, cloud in enumerate(scenario.cloud, 1):
        if cloud.count is not None and cloud.count > 20:
            settings.append(f"cloud.{number}.count=20")
        if cloud.weight is not None and cloud.total_charge is not None:
            settings.append(f'cloud.{number}.total_charge="{cloud.total_charge / 100.0!r} C"')
    return [word for each in settings for word in ("--set", each)]


@pytest.fixture(scope="module")
def ended(tmp_path_factory: pytest.TempPathFactory) -> list[tuple[str, int, Path]]:
    """Every run: what was done to its scenario, its exit code, its folder."""
    folder = tmp_path_factory.mktemp("mutated")
    found = []
    for number, (name, loaded) in enumerate(_read(folder)):
        output = folder / f"run{number}"
        arguments = ["run", str(loaded.path), "-o", str(output), "--no-pictures"]
        found.append((name, main([*arguments, *_short(loaded)]), output))
    return found


def test_every_run_ends_with_an_outcome_or_a_clear_error(
    ended: list[tuple[str, int, Path]],
) -> None:
    assert RUNS == len(ended)
    assert [] == [(name, code) for name, code, _ in ended if code not in {*OUTCOMES, 2}]


def test_most_runs_are_carried_out_and_their_record_says_how_they_ended(
    ended: list[tuple[str, int, Path]],
) -> None:
    carried_out = [(name, code, folder) for name, code, folder in ended if code in OUTCOMES]
    assert len(carried_out) > 0.6 * RUNS
    for name, code, folder in carried_out:
        found = open_run(folder)
        assert (OUTCOMES[code], code) == (found.outcome.word, found.outcome.exit_code), name
        assert [] == found.damage(thorough=True), name


def test_a_run_that_is_refused_leaves_no_record(ended: list[tuple[str, int, Path]]) -> None:
    assert [] == [name for name, code, folder in ended if code == 2 and folder.exists()]
