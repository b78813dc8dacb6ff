"""The arguments of ``driftwell info``."""

from __future__ import annotations

import argparse
from typing import Any


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser("info", help="summarise a run's folder")
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")


def carry_out(asked: argparse.Namespace) -> int:
    """Summarise it; returns the exit code."""
    from driftwell.cli.info import info

    return info(asked.run)
