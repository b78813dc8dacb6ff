"""The digests of a study's cases are those of the scenarios their settings make."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from driftwell.scenario.read import read_scenario
from driftwell.study.identity import digests
from tests.study.small_study import study, vary


def test_a_case_has_the_digest_of_its_scenario(tmp_path: Path) -> None:
    found = study(
        tmp_path,
        "replicas = 2\n"
        + vary("cloud.load.count", "values = [3, 5]")
        + vary(
            "field.rods.voltage", 'values = ["3 V", { amplitude = "5 V", frequency = "1 MHz" }]'
        ),
        "duration=15 us",
    )
    expected = [read_scenario(found.scenario_path, case.settings).digest for case in found.cases]
    assert expected == list(digests(found))
    assert 8 == len(set(expected))


def test_a_case_that_makes_no_scenario_has_none(tmp_path: Path) -> None:
    text = vary("field.rods.radius", 'from = "3 mm"\nto = "4 mm"\npoints = 320')
    found = study(tmp_path, text)
    scenario = found.scenario_text.replace('axis = "x"', 'axis = "w"')
    broken = replace(found, scenario_text=scenario, cases=found.cases[:2])
    assert [None, None] == list(digests(broken))
