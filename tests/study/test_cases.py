"""Studies made of a list of cases."""

from __future__ import annotations

import tomllib
from pathlib import Path

import pytest

from driftwell.errors import ScenarioError
from driftwell.scenario.read import read_scenario
from driftwell.study.cases import study_of
from tests.study.small_study import SCENARIO


def test_each_case_is_the_scenario_with_common_settings_and_its_own(tmp_path: Path) -> None:
    path = tmp_path / "rods.toml"
    path.write_text(SCENARIO, encoding="utf-8")
    study = study_of(path, ["seed=3"], [[], ["stepping.step=1 ns"]], "Two of them")
    assert [1, 2] == [case.number for case in study.cases]
    assert [("seed=3",), ("seed=3", "stepping.step=1 ns")] == [c.settings for c in study.cases]
    found = [read_scenario(study.scenario_path, case.settings).scenario for case in study.cases]
    assert ["auto", 1e-9] == [each.stepping.step for each in found]
    assert [3, 3] == [each.seed for each in found]


def test_the_list_is_kept_as_a_text_that_says_all_settings(tmp_path: Path) -> None:
    path = tmp_path / "rods.toml"
    path.write_text(SCENARIO, encoding="utf-8")
    study = study_of(path, [], [[], ['field."rods".radius=3 mm']], 'What is "far"')
    table = tomllib.loads(study.text)
    assert 'What is "far"' == table["title"]
    assert [[], ['field."rods".radius=3 mm']] == [case["set"] for case in table["case"]]


def test_a_scenario_that_is_not_there_is_told(tmp_path: Path) -> None:
    with pytest.raises(ScenarioError, match=r"none\.toml"):
        study_of(tmp_path / "none.toml", [], [[]], "Nothing")
