"""The arguments of ``driftwell check``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import add_settings
from driftwell.exit_codes import FINISHED, UNUSABLE

_TEXT = """\
Reads the file without running anything, and says in words what it would simulate, with what
is worth knowing and which hazards it can see; or every fault it finds, with its line.
"""
_EXAMPLES = (
    "driftwell check trap.toml",
    "driftwell check trap.toml --set cloud.ions.count=500",
)
_CODES = {
    FINISHED: "the file can be run",
    UNUSABLE: "it cannot: its faults have been told",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "check",
        "say what a scenario or study would simulate, or its faults",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario or study file (TOML)")
    add_settings(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Say it; returns the exit code."""
    from driftwell.cli.check import check

    return check(asked.file, asked.settings)
