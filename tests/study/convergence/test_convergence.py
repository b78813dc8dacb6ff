"""Whole convergence studies of small runs: known errors are found, nothing is computed twice."""

from __future__ import annotations

import csv
import math
from dataclasses import replace
from pathlib import Path
from typing import Any

import h5py
import pytest

from driftwell.errors import StudyError
from driftwell.record.reader import open_run
from driftwell.report.study_pictures.convergence import convergence_figure, draw_convergence
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.differences import AxisError
from driftwell.study.convergence.driver import Outcome
from driftwell.study.convergence.plan import Wanted
from driftwell.study.convergence.table import Report
from driftwell.study.convergence.verdict import Convergence
from driftwell.study.convergence.words import answer_lines, converged
from driftwell.study.sweep_folder import run_folder
from tests.cli.small_runs import SMALL
from tests.scenario.good_scenarios import toml_file
from tests.study.convergence.computed import Computed

FREQUENCY = 100e3
SHORT = ("duration=4 us", "cloud.load.count=4")


def bowl(folder: Path, scheme: str, parts: int) -> Path:
    """One ion in a bowl without friction, so many steps a period, and its frequency."""
    table: dict[str, Any] = {
        "title": "One ion in a bowl",
        "duration": "100 us",
        "species": {"ion": {"mass": "100 u", "charge": "1 e"}},
        "cloud": [
            {
                "name": "one",
                "species": "ion",
                "shape": {"kind": "points", "positions": [["0 m", "0 m", "0.1 mm"]]},
            }
        ],
        "field": [
            {
                "name": "bowl",
                "kind": "static-quadrupole",
                "axial_frequency": {"species": "ion", "value": f"{FREQUENCY} Hz"},
            }
        ],
        "stepping": {"step": f"{1.0 / FREQUENCY / parts!r} s", "scheme": scheme},
        "record": {"every": "10 us"},
        "question": [
            {"name": "tune", "ask": "frequency", "of": "one", "axis": "z", "every": "2 us"}
        ],
    }
    path = folder / "bowl.toml"
    path.write_text(toml_file(table))
    return path


def small(folder: Path) -> Path:
    path = folder / "small.toml"
    path.write_text(SMALL)
    return path


def report_of(outcome: Outcome) -> Report:
    assert outcome.report is not None
    return outcome.report


def rows(outcome: Outcome) -> dict[str, Convergence]:
    return {row.answer.name: row for row in report_of(outcome).rows}


@pytest.mark.parametrize("parts", [50, 200])
def test_the_step_error_of_a_frequency_is_that_of_the_leap_frog(tmp_path: Path, parts: int) -> None:
    """w_d = (2/h) asin(w h / 2).

    R. W. Hockney, J. W. Eastwood, Computer Simulation Using Particles, ch. 4 (from memory).
    """
    turn = 2.0 * math.pi / parts
    exact = FREQUENCY * (2.0 / turn) * math.asin(turn / 2.0)
    row = rows(Computed(tmp_path / "c")(Wanted(bowl(tmp_path, "kick-drift-kick", parts))))["tune"]
    assert exact == pytest.approx(row.answer.value, rel=1e-9, abs=0.0)
    step = row.axes["step"]
    assert {"step"} == row.axes.keys()
    assert "richardson" == step.kind
    assert step.order is not None
    assert 2.0 == pytest.approx(step.order, rel=0.005, abs=0.0)
    # what is left after the leading order: (w h)^4 terms, some (w h)^2 of it
    assert exact - FREQUENCY == pytest.approx(step.error, rel=turn**2, abs=0.0)
    assert "dominated by the step" == row.verdict(None)
    assert "dominated by the step" == row.verdict(0.5 * (exact / FREQUENCY - 1.0))
    assert "converged" == row.verdict(2.0 * (exact / FREQUENCY - 1.0))


def test_a_scheme_of_order_four_is_seen_as_one(tmp_path: Path) -> None:
    row = rows(Computed(tmp_path / "c")(Wanted(bowl(tmp_path, "composed-4", 50))))["tune"]
    order = row.axes["step"].order
    assert order is not None
    assert 4.0 == pytest.approx(order, rel=0.03, abs=0.0)
    assert abs(row.answer.value - FREQUENCY) == pytest.approx(
        row.axes["step"].error, rel=0.05, abs=0.0
    )


def test_every_run_is_computed_once_also_after_a_stop(tmp_path: Path) -> None:
    computed, wanted = Computed(tmp_path / "c"), Wanted(small(tmp_path), SHORT, replicas=3)
    stopped = computed(wanted, goes=lambda progress: progress.computed + progress.there < 2)
    assert stopped.result.stopped
    assert stopped.report is None
    before = len(computed.asked)
    assert 0 < before < 5
    outcome = computed(wanted, 0.9)
    digests = [content["digest"] for content in computed.asked]
    assert 5 == len(digests) == len(set(digests))
    assert {"step", "seeds"} == rows(outcome)["held"].axes.keys()
    again = computed(wanted, 0.9)
    assert 5 == len(computed.asked)
    assert 0 == computed.told[-1][1].runs
    assert 5 == again.result.progress.there
    assert report_of(outcome).rows == report_of(again).rows


def test_the_judged_run_is_the_scenario_itself_and_seeds_alone_differ_from_it(
    tmp_path: Path,
) -> None:
    computed, path = Computed(tmp_path / "c"), small(tmp_path)
    outcome = computed(Wanted(path, SHORT, replicas=2))
    assert list(SHORT) == computed.asked[0]["settings"]
    headers = [open_run(run_folder(computed.folder, d)).header for d in all_digests(outcome)]
    assert [20e-9, 10e-9, 5e-9, 20e-9] == pytest.approx(
        [header.step for header in headers], rel=1e-12, abs=0.0
    )
    assert [7, 7, 7] == [header.seed for header in headers[:3]]
    assert 7 != headers[3].seed


def all_digests(outcome: Outcome) -> list[str]:
    return [outcome.result.digests[k] for k in sorted(outcome.result.digests)]


def test_all_held_in_all_runs_is_unchanged_and_as_sure_as_its_number_of_ions(
    tmp_path: Path,
) -> None:
    outcome = Computed(tmp_path / "c")(Wanted(small(tmp_path), SHORT, replicas=2))
    row = rows(outcome)["held"]
    assert (1.0, 0.0) == (row.answer.value, row.axes["step"].error)
    assert "unchanged" == row.axes["step"].kind
    assert row.answer.error == row.combined
    assert "dominated by chance" == row.verdict(0.01)


def test_a_coarse_tree_is_judged_by_the_direct_sum(tmp_path: Path) -> None:
    keys = ("cloud.load.count=300", "duration=1 us", "coulomb.method=tree", "coulomb.accuracy=0.1")
    computed = Computed(tmp_path / "c")
    row = rows(computed(Wanted(small(tmp_path), keys, ("coulomb",))))["warmth"]
    assert "coulomb.method=direct" in computed.asked[1]["settings"]
    direct = open_run(computed.asked[1]["folder"])
    exact = next(each.value for each in direct.answers if each.name == "warmth")
    found = row.axes["coulomb"]
    assert abs(exact - row.answer.value) == found.error
    assert 1e-12 < found.error / exact < 1e-2
    assert "difference to the direct sum" == found.how


@pytest.mark.parametrize(("seed", "verdict"), [(1, "not answered in all runs"), (7, "no value")])
def test_an_answer_that_some_runs_lack_is_told_as_such(
    tmp_path: Path, seed: int, verdict: str
) -> None:
    text = SMALL + (
        '\n[[detector]]\nname = "d"\nkind = "plane"\nat = ["0 m", "0 m", "0 m"]\n'
        '\n[[question]]\nname = "when"\nask = "arrival-time"\nof = "d"\n'
    )
    path = tmp_path / "small.toml"
    path.write_text(text)
    keys = ("duration=2 us", "cloud.load.count=1", f"seed={seed}")
    outcome = Computed(tmp_path / "c")(Wanted(path, keys, ("seeds",), 2))
    assert verdict == rows(outcome)["when"].verdict(0.5)
    told = answer_lines(report_of(outcome), 80)
    below = told[next(k for k, line in enumerate(told) if line.startswith("when")) + 1 :]
    assert (verdict == "no value") is (not below)


def test_tables_and_picture_hold_what_was_found(tmp_path: Path) -> None:
    computed = Computed(tmp_path / "c")
    wanted = Wanted(small(tmp_path), SHORT, replicas=3)
    outcome = computed(wanted, 0.3)
    lines = list(csv.DictReader((computed.folder / "convergence.csv").read_text().splitlines()))
    assert ["held", "warmth"] == [line["question"] for line in lines]
    heads = [f"{axis}_{what}" for axis in AXES for what in ("error", "order", "how")]
    first = ["question", "value", "unit", "sampling_error"]
    assert [*first, *heads, "combined_error", "verdict"] == list(lines[0])
    row = rows(outcome)["warmth"]
    assert row.answer.value == float(lines[1]["value"])
    assert row.combined == float(lines[1]["combined_error"])
    assert row.axes["step"].error == float(lines[1]["step_error"])
    assert ("", "") == (lines[1]["weight_error"], lines[1]["coulomb_how"])
    assert row.verdict(0.3) == lines[1]["verdict"]
    with h5py.File(computed.folder / "convergence.h5") as file:
        assert {"answers", "axes", "runs"} == set(file)
        assert [b"step", b"seeds"] == list(file.attrs["axes"])
        assert 0.3 == file.attrs["tolerance"]
        assert row.combined == file["answers"]["combined_error"][1]
        assert row.axes["seeds"].error == file["axes/seeds"]["error"][1]
        assert 5 == len(file["runs/run"])
        assert b"finished" == file["runs/run"]["outcome"][4]
    (picture,) = draw_convergence(computed.folder, report_of(outcome))
    assert picture.read_bytes().startswith(b"\x89PNG")
    tiny = replace(
        row, axes={**row.axes, "step": AxisError(1e-12, "richardson", "Richardson", 2.0)}
    )
    figure = convergence_figure(replace(report_of(outcome), rows=(tiny,)))
    assert figure is not None
    low, high = figure.axes[0].get_xlim()
    assert 1e8 < high / low < 1e9
    assert any("not shown" in text.get_text() for text in figure.texts)
    text = "\n".join(answer_lines(report_of(outcome), 80))
    assert "warmth: " in text
    assert "seeds" in text
    assert converged(report_of(outcome), ["held"]) == (rows(outcome)["held"].combined <= 0.3)


def test_a_scenario_without_questions_is_refused_in_a_line(tmp_path: Path) -> None:
    path = tmp_path / "small.toml"
    path.write_text(SMALL[: SMALL.index("[[question]]")])
    with pytest.raises(StudyError, match="asks no questions"):
        Computed(tmp_path / "c")(Wanted(path))
