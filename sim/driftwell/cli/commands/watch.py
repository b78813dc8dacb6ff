"""The arguments of ``driftwell watch``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command

_TEXT = """\
Shows a run, or a sweep with all its runs, in place on a terminal until none goes on; anywhere
else once, as text. It only reads: it may be ended and started at any time.
"""
_EXAMPLES = (
    "driftwell watch trap-run",
    "driftwell watch sweep-sweep --once",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "watch",
        "show how far a run or a sweep is",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("folder", metavar="FOLDER", help="a run's folder, or a sweep's")
    parser.add_argument("--once", action="store_true", help="show it once, as text")


def carry_out(asked: argparse.Namespace) -> int:
    """Show it; returns the exit code."""
    from driftwell.cli.runs.watch import watch

    return watch(asked.folder, asked.once)
