"""The arguments of ``driftwell fields``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.shared import add_settings, add_threads
from driftwell.cli.options.types import folder


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "fields", help="solve the field of a scenario's electrodes, tell and draw it"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario file (TOML)")
    parser.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help="where to leave the pictures (default: the file's name with -fields, here)",
    )
    parser.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    add_threads(parser)
    add_settings(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Solve, tell and draw; returns the exit code."""
    from driftwell.cli.thread_limit import limited_threads

    threads = limited_threads(asked.threads)
    from driftwell.cli.fields import fields_command

    return fields_command(
        asked.file, asked.output, asked.settings, threads, pictures=not asked.no_pictures
    )
