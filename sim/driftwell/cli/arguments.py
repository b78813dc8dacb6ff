"""The whole command line: its parser, and how what nobody knows is refused.

Nothing heavy is imported here: ``--help`` answers at once.
"""

from __future__ import annotations

import argparse
import difflib
import re
import sys
from collections.abc import Iterable, Sequence

from driftwell._version import __version__
from driftwell.cli.commands.table import COMMANDS, GROUPS
from driftwell.cli.options.command import Parser, code_lines, filled
from driftwell.cli.terminal.printing import tell
from driftwell.exit_codes import MEANINGS, UNUSABLE

START = """\
driftwell needs a COMMAND. To begin:
  driftwell new rf-trap            writes a commented starting scenario, rf-trap.toml
  driftwell run rf-trap.toml       runs it, and answers its questions
  driftwell report rf-trap-run     makes one page of it, to look at
`driftwell --help` names all commands."""
_TEXT = """\
How many charges is too many? Follows charged particles under their own repulsion in traps and
beam lines, keeps the account, and answers with error bars.
"""
_COLUMN = 12


class Whole(Parser):
    """The parser of the whole line; its help names the commands by the job they are for."""

    commands: dict[str, Parser]

    def format_help(self) -> str:
        """Commands in groups, each with its line; then the exit codes of all."""
        listed = [
            line
            for job, group in GROUPS.items()
            for line in (f"{job}:", *(self._line(each.__name__) for each in group), "")
        ]
        return "\n".join(
            [
                self.format_usage(),
                filled(_TEXT),
                "",
                *listed,
                "`driftwell COMMAND --help` says more, with examples; `driftwell --version` says",
                "which driftwell this is.",
                "",
                *code_lines(MEANINGS, ()),
                "",
            ]
        )

    def _line(self, module: str) -> str:
        name = module.rpartition(".")[2]
        return f"  {name:{_COLUMN}}{self.commands[name].line}"


def parser() -> Whole:
    """The whole command line."""
    whole = Whole(prog="driftwell", description=filled(_TEXT))
    whole.add_argument("--version", action="version", version=f"driftwell {__version__}")
    commands = whole.add_subparsers(
        dest="command", metavar="COMMAND", required=True, parser_class=Parser
    )
    for command in COMMANDS:
        command.add(commands)
    whole.commands = dict(commands.choices)
    return whole


def parsed(arguments: Sequence[str] | None = None) -> argparse.Namespace:
    """What is asked for; leaves with a sentence where that cannot be said."""
    words = list(sys.argv[1:] if arguments is None else arguments)
    if not words:
        tell(START)
        sys.exit(UNUSABLE)
    whole = parser()
    command = next((word for word in words if not word.startswith("-")), None)
    if command is not None and command not in whole.commands:
        whole.error(f"{command[:40]!r} is no command{_meant(command, whole.commands)}")
    asked, unknown = whole.parse_known_args(words)
    if unknown:
        known = whole.commands[asked.command]
        option = next((word for word in unknown if word.startswith("--")), "")
        options = re.findall(r"(?<![\w-])--[a-z][a-z-]*", known.format_help())
        known.error(
            f"unrecognized arguments: {' '.join(unknown)[:200]}"
            + _meant(option.partition("=")[0], options)
        )
    return asked


def _meant(word: str, known: Iterable[str]) -> str:
    """The nearest of what is known, as the end of a sentence."""
    near = difflib.get_close_matches(word, sorted(set(known)), n=1)
    return f"; did you mean {near[0]}?" if near else ""
