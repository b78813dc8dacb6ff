"""`driftwell check` and `driftwell schema`: what they print, where, and their exit codes."""

from __future__ import annotations

import json
from pathlib import Path

import pytest

from driftwell.cli.check import check
from driftwell.cli.schema import schema
from driftwell.scenario.schema import json_schema
from tests.scenario.good_scenarios import TRAP


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


def test_the_schema_is_printed_as_json(capsys: pytest.CaptureFixture[str]) -> None:
    assert 0 == schema()
    assert json_schema() == json.loads(capsys.readouterr().out)
