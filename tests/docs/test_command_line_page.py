"""The page of the command line names everything that can be typed, and shows it as it is typed."""

from __future__ import annotations

import argparse
import runpy
from pathlib import Path

from driftwell.cli.arguments import parser

ROOT = Path(__file__).resolve().parents[2]
PAGE = ROOT / "docs" / "command-line.md"
WRITTEN = runpy.run_path(str(ROOT / "tools" / "command_line.py"))["page"]


def test_every_option_of_every_command_stands_in_its_section() -> None:
    sections = {
        part.split("\n", 1)[0].removeprefix("driftwell "): part
        for part in PAGE.read_text(encoding="utf-8").split("\n## ")
    }
    commands = parser().commands
    assert set(commands) <= set(sections)
    for name, command in commands.items():
        options = [option for action in command._actions for option in action.option_strings]
        assert "--help" in options
        missing = [each for each in options if f"`{each}" not in sections[name]]
        assert [] == missing, name


def test_help_is_shown_as_it_stands_with_defaults_examples_and_codes() -> None:
    whole = argparse.ArgumentParser(
        prog="some", epilog="exit codes:\n  0  well\n  3  all <lost>", description="A *b* [c]."
    )
    whole.add_argument("--to", metavar="A|B", default=3, help="how | far_it goes")
    whole.add_argument("file", nargs="+")
    page = WRITTEN(whole, {})
    assert "A \\*b\\* \\[c\\].\n" in page
    assert "| `--to A|B` | how \\| far\\_it goes | `3` |" in page.replace("A\\|B", "A|B")
    assert "| `file [file ...]` |  |" in page
    assert "Exit codes:\n\n```text\n0  well\n3  all <lost>\n```\n" in page
