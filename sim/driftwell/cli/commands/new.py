"""The arguments of ``driftwell new``."""

from __future__ import annotations

import argparse
from pathlib import Path
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.types import file

_TEXT = """\
Writes a small scenario, or a study with the scenario it varies, as a file whose comments say
what to change. Its values are invented. Nothing is ever written over. Without a KIND, all kinds
are named.
"""
_EXAMPLES = (
    "driftwell new",
    "driftwell new rf-trap -o trap.toml",
    "driftwell new sweep",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "new",
        "write a commented starting scenario or study",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out, parser=parser)
    parser.add_argument("kind", nargs="?", metavar="KIND", help="which one; without, all are named")
    parser.add_argument("--list", action="store_true", help="name the kinds, one a line")
    parser.add_argument(
        "-o",
        "--output",
        type=file,
        metavar="FILE",
        help="the file to write (default: KIND.toml, here)",
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Write it, or name all; returns the exit code."""
    from driftwell.cli.new import list_kinds, new_scenario

    if asked.list or asked.kind is None:
        if asked.output is not None:
            asked.parser.error("-o says where to write a KIND: give the kind too, without --list")
        return list_kinds()
    return new_scenario(asked.kind, None if asked.output is None else Path(asked.output))
