"""What is printed survives odd characters, poor encodings, closed pipes and full disks."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest

from driftwell.cli.terminal.printing import shown, sign, width
from tests.cli.small_runs import SMALL, command, scenario, settings, started


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("plain\ntext", "plain\ntext"),
        ("Größe 3 µm ± 1, 😀", "Größe 3 µm ± 1, 😀"),
        ("\x1b[31mred", "\\u001b[31mred"),
        ("a\u202eb\u2028c", "a\\u202eb\\u2028c"),
        ("name \udcff.toml", "name \\udcff.toml"),
    ],
)
def test_characters_that_would_upset_a_terminal_are_written_out(text: str, expected: str) -> None:
    assert expected == shown(text)


def test_lines_in_a_file_are_of_one_width(capsys: pytest.CaptureFixture[str]) -> None:
    assert 100 == width()


def test_the_sign_between_value_and_error_can_be_written(monkeypatch: pytest.MonkeyPatch) -> None:
    class Stream:
        encoding = "ascii"

    monkeypatch.setattr(sys, "stdout", Stream())
    assert "+-" == sign()
    Stream.encoding = "utf-8"
    assert "±" == sign()
    monkeypatch.setattr(sys, "stdout", None)
    assert "+-" == sign()


def test_an_odd_title_runs_and_is_printed_where_only_ascii_can_be(tmp_path: Path) -> None:
    path = scenario(tmp_path, SMALL.replace("Eight ions", "Größe \u202e 😀"))
    given = settings("duration=2 us")
    done = command(
        *("run", path, "-o", tmp_path / "run", "--no-pictures", *given), PYTHONIOENCODING="ascii"
    )
    assert 0 == done.returncode, done.stderr
    assert done.stderr.startswith("Gr\\xf6\\xdfe \\u202e \\U0001f600 in a trap\n")
    assert "held    1.000 +- 0.056" in done.stdout
    done = command("info", tmp_path / "run", PYTHONIOENCODING="ascii")
    assert 0 == done.returncode
    assert done.stdout.startswith("Gr\\xf6\\xdfe \\u202e \\U0001f600 in a trap\n")


def test_files_whose_names_are_no_text_are_told_in_words(tmp_path: Path) -> None:
    done = command("run", tmp_path / "odd \udcff\n.toml")
    assert 2 == done.returncode
    assert "there is no such file" in done.stderr
    assert "odd \\U0000DCFF\\n.toml" in done.stderr
    assert 1 == done.stderr.count("\n")


@pytest.mark.parametrize("arguments", [["schema"], ["check"], ["--help"]])
def test_a_reader_that_leaves_early_is_no_fault(arguments: list[str], tmp_path: Path) -> None:
    if arguments == ["check"]:
        arguments = ["check", str(scenario(tmp_path))]
    process = started(*arguments)
    assert process.stdout is not None
    assert process.stderr is not None
    process.stdout.close()
    assert "" == process.stderr.read()
    assert 0 == process.wait(timeout=60)
    process.stderr.close()


@pytest.mark.parametrize("arguments", [["schema"], ["check"]])
def test_a_full_disk_behind_the_output_is_told(arguments: list[str], tmp_path: Path) -> None:
    if arguments == ["check"]:
        arguments = ["check", str(scenario(tmp_path))]
    with Path("/dev/full").open("w") as full:
        done = subprocess.run(
            [sys.executable, "-m", "driftwell", *arguments],
            stdout=full,
            stderr=subprocess.PIPE,
            text=True,
            timeout=60,
            check=False,
        )
    assert (2, "The output cannot be written (No space left on device).\n") == (
        done.returncode,
        done.stderr,
    )


def test_closed_streams_are_no_fault(tmp_path: Path) -> None:
    """As after `driftwell check FILE >&- 2>&-`."""
    script = f'exec {sys.executable} -m driftwell check "$0" >&- 2>&-'
    done = subprocess.run(["sh", "-c", script, str(scenario(tmp_path))], timeout=60, check=False)
    assert 0 == done.returncode
