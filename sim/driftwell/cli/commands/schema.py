"""The arguments of ``driftwell schema``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command

_TEXT = """\
Prints a description of all keys of scenario files, or with --study of study files, with which
an editor completes and checks while you type.
"""
_EXAMPLES = (
    "driftwell schema > scenario.schema.json",
    "driftwell schema --study > study.schema.json",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "schema",
        "print the JSON Schema of scenario or study files, for editors",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument(
        "--study", action="store_true", help="of study files, with [[vary]], [sample] and [limit]"
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Print it; returns the exit code."""
    from driftwell.cli.schema import schema

    return schema(asked.study)
