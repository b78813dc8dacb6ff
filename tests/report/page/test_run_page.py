"""The page of a run: what stands in it, that all of it is escaped, and that it is one whole."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path

import pytest

from driftwell.errors import RecordError
from driftwell.record.reader import Run, open_run
from driftwell.report.again import read_again, scenario_of
from driftwell.report.run_page.page import run_page
from driftwell.report.written import write_report
from driftwell.run import run
from driftwell.scenario.read import read_scenario
from tests.cli.small_runs import SMALL
from tests.report.page.well_formed import Checked
from tests.running import Unwatched

HOSTILE = "</script><script>alert(1)</script><img src=x onerror=alert(2)>&amp;\u202e"
SHORT = ("duration=4 us", "stepping.step=20 ns")


def carried_out(folder: Path, text: str, *settings: str) -> Run:
    path = folder / "small.toml"
    path.write_text(text, "utf-8")
    loaded = read_scenario(path, (*SHORT, *settings))
    return open_run(run(loaded, folder / "run", Unwatched()).folder)


@pytest.fixture(scope="module")
def small(tmp_path_factory: pytest.TempPathFactory) -> Run:
    """A hot cloud in a trap, with a wall near enough to take charges, a detector and 2 kV."""
    text = SMALL.replace('radius = "1 mm"', 'radius = "250 um"').replace("180 V", "2 kV")
    text = text.replace("10 K", "20000 K")
    text += '\n[[detector]]\nname = "middle"\nkind = "plane"\nat = ["0 m", "0 m", "0 m"]\n'
    text += '\n[[question]]\nname = "tune"\nask = "frequency"\nof = "load"\naxis = "z"\n'
    return carried_out(tmp_path_factory.mktemp("page"), text, "field.rods.radius=10 mm")


@pytest.fixture(scope="module")
def text(small: Run) -> str:
    """Its page."""
    return run_page(small)


@pytest.fixture(scope="module")
def page(text: str) -> Checked:
    """Its page, read by a parser."""
    return Checked(text)


def test_the_page_of_a_run_is_well_formed_and_holds_what_the_run_says(
    small: Run, page: Checked
) -> None:
    assert [] == page.faults
    for each in (
        "Eight ions in a trap",
        "Finished",
        "The motion was followed to t = 4 us.",
        *(answer.name for answer in small.answers),
        "Voltages up to 2 kV kill",
        "driftwell says nothing of safety",
        "linear quadrupole",
        "tube along z, radius 0.25 mm",
        "Relative residuals over 5 rows of the ledger.",
        "angular momentum",
        "What each surface took",
        "Passages through detectors",
        f"seed {small.header.seed}",
        small.header.digest,
        small.header.scenario_sha256,
        small.header.processor,
        "How to read the numbers",
    ):
        assert each in page.text, each
    assert small.header.command in page.text
    assert str(small.folder) not in page.text.replace(small.header.command, "")


def test_every_picture_has_words_with_numbers(page: Checked) -> None:
    assert 5 <= len(page.images)
    assert all(len(words) > 40 and any(c.isdigit() for c in words) for words in page.images)


def test_the_losses_stand_in_coulombs_and_joules(small: Run, page: Checked) -> None:
    losses = small.losses()
    assert 0 < len(losses)
    energy = losses["kinetic_energy"].mean() / 1.602176634e-19
    text = page.text
    assert f"bore load {len(losses)} {len(losses)} " in text
    assert any(
        f"{energy / scale:.4g} {unit}" in text for scale, unit in ((1e-3, "meV"), (1.0, "eV"))
    )


def test_the_same_run_gives_the_same_bytes(small: Run, text: str, tmp_path: Path) -> None:
    written = write_report(small.folder, tmp_path / "again.html")
    assert written.path.stat().st_size == written.bytes
    assert text.encode() == written.path.read_bytes()


def test_nothing_that_a_user_wrote_becomes_part_of_the_page(tmp_path: Path) -> None:
    quoted = HOSTILE.replace("\u202e", "\\u202e")
    text = SMALL.replace("Eight ions in a trap", quoted).replace('"held"', '"he<b>ld"')
    text = text.replace('"bore"', '"bo<i>re"').replace('"load"', '"lo<u>ad"')
    made = carried_out(
        tmp_path, text + f"\n# {quoted}\n", "cloud.'lo<u>ad'.motion.temperature=40000 K"
    )
    page = run_page(made)
    checked = Checked(page)
    assert [] == checked.faults
    assert not {"b", "i", "u"} & checked.tags
    assert "\u202e" not in page
    assert "<script>alert" not in page
    assert "he<b>ld" in checked.text
    assert "lo<u>ad" in checked.text
    assert page.count("</script>") == page.count("<script")


@pytest.mark.parametrize(
    ("kind", "told"),
    [
        ("stopped", "Stopped on request."),
        ("odd", "An invented cloud"),
        ("one", "1 simulated charges"),
    ],
)
def test_runs_of_all_kinds_have_a_page(run_of: Callable[[str], Run], kind: str, told: str) -> None:
    page = Checked(run_page(run_of(kind)))
    assert [] == page.faults
    assert told in page.text or kind == "odd"
    assert "It cannot be put into words" in page.text


def test_a_run_that_was_cut_off_says_so_on_top(small: Run, tmp_path: Path) -> None:
    folder = Path(shutil.copytree(small.folder, tmp_path / "run"))
    (folder / "answers.h5").unlink()
    (folder / "progress.json").unlink()
    text = Checked(run_page(open_run(folder))).text
    assert "Unfinished" in text[: text.index("Answers")] or "Unfinished" in text[:900]
    assert "The questions are answered once the run has ended." in text


def test_a_damaged_run_is_refused_in_one_message_and_nothing_is_written(
    small: Run, tmp_path: Path
) -> None:
    folder = Path(shutil.copytree(small.folder, tmp_path / "run"))
    segment = next((folder / "segments").iterdir())
    segment.write_bytes(segment.read_bytes()[:-100])
    with pytest.raises(RecordError, match=r"damaged.*No report was written\."):
        write_report(folder)
    assert not (folder / "report.html").exists()


def test_a_scenario_is_read_again_with_its_files_or_says_which_is_missing(tmp_path: Path) -> None:
    (tmp_path / "start.csv").write_text("x [m],y [m],z [m]\n0,0,1e-5\n0,0,-1e-5\n")
    text = SMALL.replace("count = 8\n", "")
    text = text.replace(
        '{ kind = "gaussian", sigma = "50 um" }', '{ kind = "file", path = "start.csv" }'
    )
    text = text.replace('motion = { temperature = "10 K" }\n', "")
    made = carried_out(tmp_path, text)
    loaded = scenario_of(made)
    assert loaded is not None
    assert made.header.digest == loaded.digest
    assert SHORT == loaded.settings
    (tmp_path / "start.csv").write_text("x [m],y [m],z [m]\n0,0,2e-5\n0,0,-1e-5\n")
    again = read_again(made)
    assert again.loaded is None
    assert again.scenario is not None
    assert 'the scenario names "start.csv"' in again.why
    assert 'names "start.csv"' in Checked(run_page(made)).text
