"""``driftwell new``: starting scenarios pass the check, run, and take no file's place."""

from __future__ import annotations

import math
import tomllib
from pathlib import Path

import pytest

from driftwell.cli.main import main
from driftwell.cli.templates import templates
from driftwell.record.reader import open_run
from driftwell.scenario.cautions import cautions
from driftwell.scenario.read import read_scenario

KINDS = sorted(templates())
SCENARIOS = sorted(kind for kind, each in templates().items() if each.scenario is None)


@pytest.mark.parametrize("kind", KINDS)
def test_what_is_written_passes_the_check(
    kind: str, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]
) -> None:
    monkeypatch.chdir(tmp_path)
    assert 0 == main(["new", kind])
    assert f"driftwell check {kind}.toml" in capsys.readouterr().out
    assert 0 == main(["check", f"{kind}.toml"])


@pytest.mark.parametrize("kind", KINDS)
def test_a_template_begins_with_one_short_line_and_marks_what_is_invented(kind: str) -> None:
    template = templates()[kind]
    assert 20 < len(template.line) <= 80 - len("penning-trap  ")
    assert template.line.endswith(".")
    assert "INVENTED" in template.text.split("title")[0]
    assert "Caution: " in template.text
    assert max(len(line) for line in template.text.splitlines() if line.startswith("#")) <= 100


@pytest.mark.parametrize("kind", SCENARIOS)
def test_a_template_says_at_its_head_every_caution_that_check_prints(
    kind: str, tmp_path: Path
) -> None:
    path = tmp_path / "new.toml"
    assert 0 == main(["new", kind, "-o", str(path)])
    loaded = read_scenario(path)
    head = " ".join(line.removeprefix("# ") for line in loaded.text.split("title")[0].splitlines())
    for sentence in cautions(loaded.scenario):
        assert sentence in head


@pytest.mark.parametrize(
    ("kind", "shorter"),
    [
        ("pulse", ["cloud.pulse.count=100"]),
        ("beam", ["cloud.bunch.count=100"]),
    ],
)
def test_a_template_runs_to_its_end_and_answers_all_it_asks(
    kind: str, shorter: list[str], tmp_path: Path
) -> None:
    path, folder = tmp_path / "new.toml", tmp_path / "run"
    assert 0 == main(["new", kind, "-o", str(path)])
    settings = [word for each in shorter for word in ("--set", each)]
    assert 0 == main(["run", str(path), "-o", str(folder), "--no-pictures", *settings])
    answers = open_run(folder).answers
    assert len(answers) >= 3
    for answer in answers:
        assert math.isfinite(answer.value), f"{answer.name}: {answer.note}"


def test_the_crystal_as_written_freezes_and_is_judged_free_of_faults(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "new.toml"
    assert 0 == main(["new", "crystal", "-o", str(path)])
    assert 0 == main(["run", str(path), "-o", str(tmp_path / "run"), "--no-pictures"])
    assert "judgement: nothing found amiss" in capsys.readouterr().out
    temperature = open_run(tmp_path / "run").answers[0]
    assert "temperature along z, frozen" == temperature.name
    assert 0.0 < temperature.value < 0.01  # K; it begins at 0.2 K


def test_the_limit_as_written_has_its_threshold_between_its_ends(tmp_path: Path) -> None:
    path = tmp_path / "limit.toml"
    assert 0 == main(["new", "limit", "-o", str(path)])
    study = tomllib.loads(path.read_text())
    limit, found = study["limit"], []
    for end in (limit["from"], limit["to"]):
        folder, charge = tmp_path / end.replace(" ", ""), f"{limit['key']}={end}"
        given = [word for each in (*study["set"], charge) for word in ("--set", each)]
        scenario = str(tmp_path / study["scenario"])
        assert 0 == main(["run", scenario, "-o", str(folder), "--no-pictures", *given])
        answers = {each.name: each for each in open_run(folder).answers}
        found.append(answers[limit["answer"]].value)
    assert found[0] > limit["crosses"] + 0.05
    assert found[1] < limit["crosses"] - 0.05


def test_a_file_that_is_there_is_never_written_over(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    path = tmp_path / "mine.toml"
    path.write_text("mine")
    assert 2 == main(["new", "beam", "-o", str(path)])
    assert "there already" in capsys.readouterr().err
    assert "mine" == path.read_text()


def test_a_study_brings_the_scenario_it_varies_where_there_is_none(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert 0 == main(["new", "sweep", "-o", str(tmp_path / "s.toml")])
    beam = tmp_path / "beam.toml"
    assert templates()["beam"].text == beam.read_text()
    beam.write_text("mine")
    assert 0 == main(["new", "limit", "-o", str(tmp_path / "l.toml")])
    assert "left as it is" in capsys.readouterr().out
    assert "mine" == beam.read_text()


def test_a_study_does_not_take_the_name_of_its_own_scenario(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert 2 == main(["new", "sweep", "-o", str(tmp_path / "beam.toml")])
    assert "scenario that the study varies" in capsys.readouterr().err
    assert [] == list(tmp_path.iterdir())


def test_without_a_kind_all_are_named_within_80_columns(
    capsys: pytest.CaptureFixture[str],
) -> None:
    assert 0 == main(["new", "--list"])
    listed = capsys.readouterr().out
    assert 0 == main(["new"])
    assert listed == capsys.readouterr().out
    assert KINDS == sorted(line.split()[0] for line in listed.split("\n\n")[0].splitlines())
    assert max(map(len, listed.splitlines())) <= 80


def test_an_unknown_kind_is_answered_with_the_nearest(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert 2 == main(["new", "penning", "-o", str(tmp_path / "new.toml")])
    assert "Did you mean penning-trap?" in capsys.readouterr().err
    assert [] == list(tmp_path.iterdir())


def test_a_folder_that_is_not_there_is_said_in_one_sentence(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    assert 2 == main(["new", "beam", "-o", str(tmp_path / "none" / "new.toml")])
    assert "cannot be written" in capsys.readouterr().err
