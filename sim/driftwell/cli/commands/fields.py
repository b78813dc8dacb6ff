"""The arguments of ``driftwell fields``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import add_no_pictures, add_output, add_settings, add_threads

_TEXT = """\
Solves the field of the electrodes that a scenario describes, as a run would, says how sure it
is and what it is made of, and draws it. Solved fields are kept: a run then takes them.
"""
_EXAMPLES = (
    "driftwell fields lens.toml",
    "driftwell fields lens.toml -o lens-pictures",
    "driftwell fields lens.toml --no-pictures",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "fields",
        "solve the field of a scenario's electrodes, tell and draw it",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario file (TOML)")
    written = add_output(
        parser, "where to leave the pictures (default: the file's name with -fields, here)"
    )
    add_no_pictures(written)
    add_settings(parser)
    add_threads(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Solve, tell and draw; returns the exit code."""
    from driftwell.cli.terminal.thread_limit import limited_threads

    threads = limited_threads(asked.threads)
    from driftwell.cli.fields import fields_command

    return fields_command(
        asked.file, asked.output, asked.settings, threads, pictures=not asked.no_pictures
    )
