"""The arguments of ``driftwell check``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.shared import add_settings


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "check", help="say what a scenario or study would simulate, or its faults"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario or study file (TOML)")
    add_settings(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Say it; returns the exit code."""
    from driftwell.cli.check import check

    return check(asked.file, asked.settings)
