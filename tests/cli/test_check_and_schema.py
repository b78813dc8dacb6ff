"""`driftwell check` and `driftwell schema`: what they print, where, and their exit codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from driftwell.cli.check import check
from driftwell.cli.main import main
from driftwell.cli.schema import schema
from driftwell.scenario.schema import json_schema
from driftwell.study.form import StudyForm
from tests.scenario.good_scenarios import TRAP
from tests.study.small_study import study_file, vary


def test_a_good_scenario_is_explained_on_stdout(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "s.toml"
    path.write_text(TRAP)
    assert 0 == check(str(path), ["duration=1 ms"])
    printed = capsys.readouterr()
    assert "" == printed.err
    assert printed.out.startswith("Barium cloud in a rod trap\n")
    assert "1 ms, seed 7" in printed.out


def test_the_faults_of_a_scenario_go_to_stderr_with_exit_code_2(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "s.toml"
    path.write_text(TRAP.replace("seed", "sed"))
    assert 2 == check(path, [])
    printed = capsys.readouterr()
    assert "" == printed.out
    assert f'{path}:3 sed: unknown key; did you mean "seed"?\n' == printed.err


def test_a_good_study_is_explained_and_a_faulty_one_is_told(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    together = 'together = "hot"\n'
    text = (
        "replicas = 2\n"
        + vary("cloud.load.count", "values = [10, 20, 30]")
        + vary("cloud.load.motion.temperature", 'values = ["100 K", "200 K"]\n' + together)
        + vary("duration", 'from = "10 us"\nto = "40 us"\npoints = 2\n' + together)
    )
    path = study_file(tmp_path, text)
    assert 0 == check(str(path), ["seed=3"])
    lines = capsys.readouterr().out.splitlines()
    assert [
        "How wide",
        f"scenario  {tmp_path / 'rods.toml'}",
        "set       seed=3",
        "varies    cloud.load.count: 3 values, 10, 20, 30",
        "          cloud.load.motion.temperature: 2 values, 100 K, 200 K",
        "          duration: 2 values, 10 us, 40 us",
        "together  cloud.load.motion.temperature with duration",
        "runs      12 cases: 6 points, each with 2 seeds",
    ] == lines
    path.write_text(path.read_text().replace("points", "point"))
    assert 2 == check(path, [])
    assert 'unknown key; did you mean "points"?' in capsys.readouterr().err


def test_the_schema_is_printed_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    assert 0 == schema()
    assert json_schema() == json.loads(capsys.readouterr().out)


def test_the_schema_of_studies_is_printed_where_it_is_asked_for(
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert 0 == main(["schema", "--study"])
    printed = json.loads(capsys.readouterr().out)
    assert json_schema(StudyForm, "driftwell study") == printed
    assert {"title", "scenario", "vary", "sample", "limit"} <= set(printed["properties"])
    assert 0 == main(["schema"])
    assert json_schema() == json.loads(capsys.readouterr().out)
