"""The arguments of ``driftwell doctor``."""

from __future__ import annotations

import argparse
from typing import Any


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "doctor", help="look at this machine and say what to do"
    )
    parser.set_defaults(carry_out=carry_out)


def carry_out(_asked: argparse.Namespace) -> int:
    """Look and say; returns the exit code."""
    from driftwell.cli.doctor.look import doctor_command

    return doctor_command()
