"""A command's parser: what its help says, and how it refuses what it does not know."""

from __future__ import annotations

import argparse
import sys
import textwrap
from collections.abc import Iterable, Mapping, Sequence
from typing import Any, NoReturn, Protocol

from driftwell.cli.terminal.printing import tell
from driftwell.exit_codes import DEFECT, FINISHED, INTERRUPTED, MEANINGS, UNUSABLE

WIDTH = 90
"""Characters of a line of the texts in a help."""
USUAL = (FINISHED, UNUSABLE, INTERRUPTED, DEFECT)
"""Codes with which every command may end."""


class Parser(argparse.ArgumentParser):
    """A parser that says what is wrong in one sentence, without its whole usage.

    line : what the command does, in one line
    """

    line = ""

    def error(self, message: str) -> NoReturn:
        """Say what cannot be used, and where to read on; leave."""
        tell(f"{self.prog}: {message}\n`{self.prog} --help` says what there is.")
        sys.exit(UNUSABLE)


class Takes(Protocol):
    """Whatever takes arguments: a parser or a group of one."""

    def add_argument(self, *names: str, **how: Any) -> argparse.Action:
        """Take one argument."""


def add_command(
    commands: Any,
    name: str,
    line: str,
    text: str,
    examples: Sequence[str],
    codes: Mapping[int, str] | None = None,
) -> Parser:
    """Add a command.

    line : what it does, in one line
    text : the same in some sentences; an empty line between paragraphs
    examples : command lines that can be typed
    codes : exit codes besides the usual, or usual ones said more closely; empty for the usual words
    """
    parser: Parser = commands.add_parser(
        name,
        help=line,
        description=filled(text),
        epilog="\n".join(
            ["examples:", *(f"  {each}" for each in examples), "", *code_lines(codes or {})]
        ),
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.line = line
    return parser


def code_lines(codes: Mapping[int, str], usual: Iterable[int] = USUAL) -> list[str]:
    """Exit codes and what each says, one a line."""
    said = {code: codes.get(code) or MEANINGS[code] for code in {*codes, *usual}}
    return [
        "exit codes:",
        *(
            line
            for code in sorted(said)
            for line in textwrap.wrap(
                said[code], WIDTH, initial_indent=f"  {code:<5}", subsequent_indent=" " * 7
            )
        ),
    ]


def filled(text: str) -> str:
    """Paragraphs, each filled to the width of a help."""
    return "\n\n".join(
        textwrap.fill(" ".join(each.split()), WIDTH, break_on_hyphens=False)
        for each in text.strip().split("\n\n")
    )
