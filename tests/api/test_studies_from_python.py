"""Studies called from Python compute what the commands compute, and give numbers back."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import driftwell
from driftwell import AnswerError, StudyError
from driftwell.study.worker import _reply, _Wish
from tests.api.small_scenarios import rods, trap
from tests.study.small_sweeps import Scripted

SWEEP = """\
title    = "Two clouds"
scenario = "trap.toml"

[[vary]]
key    = "cloud.load.count"
values = [4, 6]
"""
LIMIT = """\
title    = "How wide may the bore be?"
scenario = "trap.toml"

[limit]
key        = "cloud.load.motion.temperature"
from       = "100 K"
to         = "1e6 K"
answer     = "held"
crosses    = 0.9
resolution = "20 %"
noise      = "none"
"""


@pytest.fixture
def here(monkeypatch: pytest.MonkeyPatch) -> None:
    """Runs are carried out in this very process, which needs no start."""
    wish = _Wish()

    class Here:
        of_runs = Scripted(lambda task: _reply(task.content, wish)).of

    monkeypatch.setattr("driftwell.api.studies.Pool", Here)


def files(folder: Path, text: str = "") -> Path:
    """A scenario file, and a study of it; the study's path where it has a text."""
    path = rods(trap(duration="2 us")).save(folder / "trap.toml")
    if text:
        path = folder / "study.toml"
        path.write_text(text)
    return path


def test_a_sweep_gives_columns_of_numbers_and_the_folders_of_its_runs(tmp_path: Path) -> None:
    found = driftwell.sweep(
        files(tmp_path, SWEEP), tmp_path / "sweep", workers=1, threads=1, progress=False
    )
    assert [4, 6] == found.columns["cloud.load.count"].tolist()
    assert [1.0, 1.0] == found.columns["held"].tolist()
    assert np.all(found.columns["warmth error"] > 0.0)
    assert ("K", "1") == (found.units["warmth"], found.units["cloud.load.count"])
    assert () == found.failures
    counts = [driftwell.open_run(each).header.clouds[0].count for each in found.runs]
    assert [4, 6] == counts
    assert "2 computed now" in str(found)
    assert (tmp_path / "sweep" / "answers.csv").exists()
    assert str(found) in (tmp_path / "sweep" / "summary.txt").read_text()
    again = driftwell.sweep(files(tmp_path, SWEEP), tmp_path / "sweep", progress=False)
    assert "2 there already" in str(again)


def test_a_limit_gives_its_interval_and_the_runs_it_took(here: None, tmp_path: Path) -> None:
    found = driftwell.limit(
        files(tmp_path, LIMIT), tmp_path / "limit", workers=1, threads=1, progress=False
    )
    assert found.found
    assert found.interval is not None
    low, high = found.interval
    assert 1.0 < high / low < 1.25
    assert low <= found.best <= high
    value, held, _ = found.values.T
    assert held[value < 1.001 * low].min() > 0.9 > held[value > 0.999 * high].max()
    assert "held" in str(found)


def test_convergence_gives_each_answer_its_errors_and_a_verdict(here: None, tmp_path: Path) -> None:
    found = driftwell.converge(
        files(tmp_path),
        tmp_path / "converge",
        axes=("step",),
        replicas=1,
        workers=1,
        threads=1,
        progress=False,
    )
    row = found["warmth"]
    assert {"step"} == set(row.axes)
    assert row.combined >= row.axes["step"].error >= 0.0
    assert row.verdict(None) == found.verdict("warmth")
    assert "warmth" in str(found)
    with pytest.raises(AnswerError, match="there are 'held', 'warmth'"):
        found["cold"]


def test_a_study_of_another_sort_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StudyError, match=r"has a \[limit\]"):
        driftwell.sweep(files(tmp_path, LIMIT), tmp_path / "sweep")
    with pytest.raises(StudyError, match=r"has no \[limit\]"):
        driftwell.limit(files(tmp_path, SWEEP), tmp_path / "limit")
    with pytest.raises(StudyError, match="is a study"):
        driftwell.converge(files(tmp_path, SWEEP), tmp_path / "converge")
