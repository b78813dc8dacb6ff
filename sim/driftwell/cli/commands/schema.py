"""The arguments of ``driftwell schema``."""

from __future__ import annotations

import argparse
from typing import Any


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "schema", help="print the JSON Schema of scenario or study files, for editors"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument(
        "--study", action="store_true", help="of study files, with [[vary]], [sample] and [limit]"
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Print it; returns the exit code."""
    from driftwell.cli.schema import schema

    return schema(asked.study)
