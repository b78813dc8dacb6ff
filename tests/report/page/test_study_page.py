"""Pages of studies: read from their folders alone, with the numbers of their own tables."""

from __future__ import annotations

import shutil
from pathlib import Path

import pytest

from driftwell.errors import RecordError
from driftwell.report.written import write_report
from driftwell.study.again.convergence import convergence_again
from driftwell.study.again.limit import limit_again
from driftwell.study.again.sweep import sweep_again
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.plan import Wanted
from driftwell.study.convergence.table import csv_lines
from driftwell.study.convergence.words import answer_lines
from driftwell.study.limit_table import limit_csv
from driftwell.study.table import case_lines, csv_text
from tests.cli.small_runs import SMALL
from tests.report.page.studies import searched, swept
from tests.report.page.well_formed import Checked
from tests.study.convergence.computed import Computed
from tests.study.small_sweeps import Scripted, ended
from tests.study.swept import study


@pytest.fixture(scope="module")
def sweep(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """Three numbers of ions, two seeds each; the study's own files are gone."""
    place = tmp_path_factory.mktemp("swept")
    path = study(place, replicas=2)
    swept(path, place / "sweep")
    path.unlink()
    (place / "small.toml").unlink()
    return place / "sweep"


def test_a_sweep_is_read_again_as_it_was_written(sweep: Path) -> None:
    assert (sweep / "answers.csv").read_text() == csv_text(case_lines(sweep_again(sweep)))


def test_the_page_of_a_sweep_holds_its_points_its_runs_and_links_to_their_reports(
    sweep: Path,
) -> None:
    first = next(iter(sweep_again(sweep).rows)).run.digest[:16]
    write_report(sweep / "runs" / first)
    page = Checked(write_report(sweep).path.read_text("utf-8"))
    assert [] == page.faults
    assert f"runs/{first}/report.html" in page.links
    for each in (
        "How many ions",
        "All runs have ended",
        "6 cases: 6 finished.",
        "cloud.load.count 3 2, 4, 8",
        "Each point was computed with 2 seeds",
        "Every run by itself (6)",
        "linear quadrupole",
        "driftwell sweep study.toml",
    ):
        assert each in page.text, each
    assert 2 == len(page.images)
    assert all("least" in words and "largest" in words for words in page.images)


def test_a_page_elsewhere_has_no_links_to_runs(sweep: Path, tmp_path: Path) -> None:
    page = Checked(write_report(sweep, tmp_path / "report.html").path.read_text("utf-8"))
    assert [] == [link for link in page.links if not link.startswith("#")]


def test_runs_that_failed_are_told_with_their_reason_escaped(tmp_path: Path) -> None:
    def fails(task: object) -> dict[str, object]:
        return ended("failed", "The motion <b>could</b> not be continued")

    swept(study(tmp_path), tmp_path / "sweep", Scripted(fails))
    page = Checked(write_report(tmp_path / "sweep").path.read_text("utf-8"))
    assert [] == page.faults
    assert "3 failed" in page.text
    assert "The motion <b>could</b> not be continued" in page.text
    assert "What failed, and why" in page.text


def test_a_search_is_led_the_same_way_again(tmp_path: Path) -> None:
    found = searched(tmp_path / "limit", tmp_path)
    again = limit_again(tmp_path / "limit")
    assert found.verdict == again.verdict
    assert csv_text(limit_csv(found)) == csv_text(limit_csv(again))
    page = Checked(write_report(tmp_path / "limit").path.read_text("utf-8"))
    assert [] == page.faults
    for each in ("Limit: 144", "the values beside it lie on its two sides", "All runs", "60 um"):
        assert each in page.text, each


def test_a_search_that_was_cut_off_says_so(tmp_path: Path) -> None:
    searched(tmp_path / "limit", tmp_path)
    with Catalogue(tmp_path / "limit" / "catalogue.sqlite") as kept:
        kept.began(kept.rows()[-1].digest)
    assert limit_again(tmp_path / "limit").verdict is None
    page = Checked(write_report(tmp_path / "limit").path.read_text("utf-8"))
    assert [] == page.faults
    assert "Not found yet" in page.text


def test_a_convergence_study_is_read_again_and_has_its_page(tmp_path: Path) -> None:
    path = tmp_path / "small.toml"
    path.write_text(SMALL.replace("count = 8", "count = 8\nweight = 2"))
    folder = tmp_path / "converge"
    outcome = Computed(folder)(Wanted(path, ("duration=2 us",), replicas=2), tolerance=0.2)
    assert outcome.report is not None
    folder_files(folder, outcome.report.plan.study.text, path.read_text())
    again = convergence_again(folder)
    assert again.report is not None
    assert csv_text(csv_lines(outcome.report)) == csv_text(csv_lines(again.report))
    assert answer_lines(outcome.report, 100) == answer_lines(again.report, 100)
    page = Checked(write_report(folder).path.read_text("utf-8"))
    assert [] == page.faults
    for row in outcome.report.rows:
        assert f"{row.answer.name} " in page.text
        assert row.verdict(0.2) in page.text
    assert "driftwell converge small.toml --set 'duration=2 us' --replicas 2 --within" in page.text


def folder_files(folder: Path, study_text: str, scenario_text: str) -> None:
    """What the command leaves beside the tables."""
    (folder / "study.toml").write_text(study_text)
    (folder / "scenario.toml").write_text(scenario_text)


def test_a_study_without_its_text_or_of_nothing_is_refused(sweep: Path, tmp_path: Path) -> None:
    folder = Path(shutil.copytree(sweep, tmp_path / "sweep"))
    (folder / "study.toml").unlink()
    with pytest.raises(RecordError, match=r"study\.toml.*put it back from a copy"):
        write_report(folder)
    (tmp_path / "empty").mkdir()
    with pytest.raises(RecordError, match="holds neither a run nor a study"):
        write_report(tmp_path / "empty")
    with pytest.raises(RecordError, match="is a folder; -o needs the name of a file"):
        write_report(sweep, tmp_path / "empty")
