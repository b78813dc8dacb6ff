"""Help: groups, examples that can be typed, exit codes; and the nearest to what was mistyped."""

from __future__ import annotations

import re
import shlex
from pathlib import Path

import pytest

from driftwell import exit_codes
from driftwell.cli.arguments import parsed, parser
from driftwell.cli.commands.table import COMMANDS
from driftwell.cli.main import main
from driftwell.cli.studies.limit import EXIT_CODES as LIMIT_CODES
from driftwell.exit_codes import MEANINGS
from driftwell.run import EXIT_CODES as RUN_CODES

HELP = {name: command.format_help() for name, command in parser().commands.items()}
README = Path(__file__).parents[2] / "README.md"


def examples(text: str) -> list[str]:
    """The command lines under the word examples."""
    return re.findall(
        r"^  (\S.*)$", text.split("\nexamples:\n")[1].split("\n\n", maxsplit=1)[0], re.MULTILINE
    )


def codes(text: str) -> set[int]:
    """The exit codes a help names."""
    return set(
        map(int, re.findall(r"^  (\d+) +\S", text.split("\nexit codes:\n")[1], re.MULTILINE))
    )


@pytest.mark.parametrize("name", HELP)
def test_every_example_of_a_help_is_accepted(name: str) -> None:
    lines = examples(HELP[name])
    assert 1 <= len(lines) <= 4
    for line in lines:
        words = shlex.split(re.sub(r"^eval \"\$\((.*)\)\"$", r"\1", line).partition(" > ")[0])
        assert ["driftwell", name] == words[:2]
        assert name == parsed(words[1:]).command


@pytest.mark.parametrize("name", HELP)
def test_every_exit_code_of_a_help_has_a_meaning_and_the_usual_are_there(name: str) -> None:
    assert {0, 1, 2, 130} <= codes(HELP[name]) <= set(MEANINGS)


def test_the_codes_a_command_ends_with_are_those_its_help_names() -> None:
    assert set(RUN_CODES.values()) <= codes(HELP["run"])
    assert set(LIMIT_CODES.values()) <= codes(HELP["limit"])


def test_every_code_has_one_name_and_one_meaning_and_stands_in_the_readme() -> None:
    named = [value for value in vars(exit_codes).values() if isinstance(value, int)]
    assert sorted(MEANINGS) == sorted(named)
    table = README.read_text("utf-8").split("| exit code |")[1].split("\n\n", maxsplit=1)[0]
    told = set(map(int, re.findall(r"^\| (\d+) \|", table, re.MULTILINE)))
    assert told == set(MEANINGS) - {exit_codes.DEFECT, exit_codes.INTERRUPTED}


def test_the_help_of_the_whole_names_every_command_with_its_line(
    capsys: pytest.CaptureFixture[str],
) -> None:
    with pytest.raises(SystemExit) as left:
        main(["--help"])
    assert 0 == left.value.code
    printed = capsys.readouterr().out
    for name, command in parser().commands.items():
        assert re.search(rf"^  {name} +{re.escape(command.line)}$", printed, re.MULTILINE)
    assert len(COMMANDS) == len(parser().commands)
    assert set(MEANINGS) == codes(printed)


@pytest.mark.parametrize(
    ("words", "told"),
    [
        (["rnu", "s.toml"], "'rnu' is no command; did you mean run?"),
        (["run", "s.toml", "--frech"], "--frech; did you mean --fresh?"),
        (["sweep", "s.toml", "--worker-s=3"], "--worker-s=3; did you mean --workers?"),
    ],
)
def test_what_is_mistyped_is_answered_with_the_nearest(
    words: list[str], told: str, capsys: pytest.CaptureFixture[str]
) -> None:
    with pytest.raises(SystemExit) as left:
        main(words)
    assert 2 == left.value.code
    assert told in capsys.readouterr().err


def test_the_bare_command_says_how_to_begin_with_lines_that_can_be_typed(
    capsys: pytest.CaptureFixture[str],
) -> None:
    with pytest.raises(SystemExit) as left:
        main([])
    assert 2 == left.value.code
    lines = re.findall(r"^  driftwell (.*?)   ", capsys.readouterr().err, re.MULTILINE)
    assert ["new", "run", "report"] == [parsed(line.split()).command for line in lines]
