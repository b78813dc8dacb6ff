"""The arguments of ``driftwell watch``."""

from __future__ import annotations

import argparse
from typing import Any


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "watch", help="show how far a run or a sweep is"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("folder", metavar="FOLDER", help="a run's folder, or a sweep's")
    parser.add_argument("--once", action="store_true", help="show it once, as text")


def carry_out(asked: argparse.Namespace) -> int:
    """Show it; returns the exit code."""
    from driftwell.cli.watch import watch

    return watch(asked.folder, asked.once)
