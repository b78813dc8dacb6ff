"""The arguments of ``driftwell report``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command

_TEXT = """\
Writes one page that needs no network and no other file: the scenario in words, answers with
their errors, pictures, losses, the ledger, the command that makes it again, and a player that
shows the charges moving.
"""
_EXAMPLES = (
    "driftwell report trap-run",
    "driftwell report sweep-sweep -o sweep.html",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "report",
        "write a run or a study as one HTML page that can be sent",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", help="folder of a run, a sweep, a convergence or a limit study")
    parser.add_argument(
        "-o", "--output", metavar="FILE", help="where to write it (default: report.html in RUN)"
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Write the page; returns the exit code."""
    from driftwell.cli.report import report_command

    return report_command(asked.run, asked.output)
