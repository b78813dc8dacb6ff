"""``driftwell completion SHELL``: a script with which a shell completes commands."""

from __future__ import annotations

import argparse
from collections.abc import Iterator

import shtab

from driftwell.cli.arguments import Whole, parser
from driftwell.cli.options.types import file, folder
from driftwell.cli.templates import templates
from driftwell.cli.terminal.printing import answer
from driftwell.exit_codes import FINISHED, UNUSABLE

FILES, FOLDERS = {"file", "study", "run"}, {"folder"}
"""Places on the command line that are files, or folders; a run is either."""


def completion(shell: str) -> int:
    """Print the script; returns the exit code."""
    return FINISHED if answer([script(shell)]) else UNUSABLE


def script(shell: str) -> str:
    """The script for a shell."""
    whole = parser()
    for name, action in _arguments(whole):
        if action.type is file or action.dest in FILES:
            action.complete = shtab.FILE  # type: ignore[attr-defined]
        elif action.type is folder or action.dest in FOLDERS:
            action.complete = shtab.DIRECTORY  # type: ignore[attr-defined]
        elif (name, action.dest) == ("new", "kind"):
            action.choices = tuple(templates())
    return str(shtab.complete(whole, shell)).rstrip("\n")


def _arguments(whole: Whole) -> Iterator[tuple[str, argparse.Action]]:
    """Every argument of every command, with the command's name."""
    for name, command in whole.commands.items():
        for action in command._actions:  # argparse offers no other way
            yield name, action
