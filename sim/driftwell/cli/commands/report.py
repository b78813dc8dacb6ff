"""The arguments of ``driftwell report``."""

from __future__ import annotations

import argparse
from typing import Any


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "report", help="write a run or a study as one HTML page that can be sent"
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
