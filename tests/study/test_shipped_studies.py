"""Every file in scenarios/studies/ reads, is marked as invented, and stands beside its scenario."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.scenario.cautions import cautions
from driftwell.scenario.read import read_scenario
from driftwell.study.read import read_study

SCENARIOS = Path(__file__).resolve().parents[2] / "scenarios"
STUDIES = [
    path
    for path in sorted((SCENARIOS / "studies").glob("*.toml"))
    if not (SCENARIOS / path.name).exists()
]


def test_there_are_studies() -> None:
    assert STUDIES


@pytest.mark.parametrize("path", STUDIES, ids=lambda path: path.stem)
def test_a_shipped_study_is_marked_as_invented_and_says_its_cautions(path: Path) -> None:
    study = read_study(path)
    assert study.text.startswith("# An invented setting: ")
    assert len(study.cases) <= 40
    head = " ".join(line.removeprefix("# ") for line in study.text.split("title")[0].splitlines())
    scenario = read_scenario(study.scenario_path, study.cases[0].settings).scenario
    for sentence in cautions(scenario):
        assert sentence.lower() in head.lower()


@pytest.mark.parametrize("path", STUDIES, ids=lambda path: path.stem)
def test_the_scenario_beside_a_study_is_the_shipped_one(path: Path) -> None:
    """A study's scenario stands in its folder; the copy must not go ways of its own."""
    beside = read_study(path).scenario_path
    assert (SCENARIOS / beside.name).read_bytes() == beside.read_bytes()
