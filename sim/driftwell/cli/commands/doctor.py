"""The arguments of ``driftwell doctor``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.exit_codes import FINISHED, UNUSABLE

_TEXT = """\
Looks at versions, processor, threads, the folders for compiled code and solved fields, memory,
disk and extras, and says behind -> what to do where something is amiss.
"""
_EXAMPLES = ("driftwell doctor",)
_CODES = {
    FINISHED: "runs can go on here",
    UNUSABLE: "something stops runs here",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "doctor",
        "look at this machine and say what to do",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)


def carry_out(_asked: argparse.Namespace) -> int:
    """Look and say; returns the exit code."""
    from driftwell.cli.doctor.look import doctor_command

    return doctor_command()
