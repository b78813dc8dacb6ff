"""What is to be said of a run, as lines."""

from __future__ import annotations

from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.cli.runs.judgement import judgement_lines
from driftwell.judgement import Finding
from tests.cli.small_runs import scenario, settings

MILD = Finding("starved detector", "3 of 10 came; 10 are wanted", 3.0, 10.0, "Set a.count = 40.")
GRAVE = Finding("account", "it is open", 0.1, 0.01, "Set a step.", grave=True)


def test_nothing_amiss_is_one_line() -> None:
    assert ["judgement: nothing found amiss"] == judgement_lines([], 80)


def test_a_finding_is_a_paragraph_and_grave_ones_stand_elsewhere() -> None:
    lines = judgement_lines([GRAVE, MILD], 50)
    assert [
        "judgement",
        "  starved detector: 3 of 10 came; 10 are wanted.",
        "    Set a.count = 40.",
    ] == lines
    assert ["judgement: nothing amiss besides"] == judgement_lines([GRAVE], 80)


def test_a_run_and_its_summary_say_the_same(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """A step as long as a fifth of the drive's period is told behind the answers, and by info."""
    folder = str(tmp_path / "run")
    arguments = ["run", str(scenario(tmp_path)), "-o", folder, "--no-pictures"]
    assert 0 == main([*arguments, *settings("duration=2 us", "stepping.step=180 ns")])
    told = " ".join(capsys.readouterr().out.split())
    assert "judgement step against the fastest motion: a step of 180 ns has 5.05 in a" in told
    assert told.index("held") < told.index("judgement") < told.index("record: ")
    assert 0 == main(["info", folder])
    assert "a step of 180 ns has 5.05 in a" in " ".join(capsys.readouterr().out.split())
    assert 0 == main([*arguments, *settings("duration=2 us", "question=[]"), "--fresh"])
    assert "\njudgement: nothing found amiss\n" in capsys.readouterr().out
