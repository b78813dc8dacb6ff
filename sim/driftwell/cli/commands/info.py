"""The arguments of ``driftwell info``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.exit_codes import UNUSABLE

_TEXT = """\
Says what a run's folder holds: how it was made, how it ended, its answers beside hand
calculations, the ledger, and what is to be said of them. Works while the run goes on.
"""
_EXAMPLES = ("driftwell info trap-run",)
_CODES = {
    UNUSABLE: "the run's folder cannot be read",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "info",
        "summarise a run's folder",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")


def carry_out(asked: argparse.Namespace) -> int:
    """Summarise it; returns the exit code."""
    from driftwell.cli.info import info

    return info(asked.run)
