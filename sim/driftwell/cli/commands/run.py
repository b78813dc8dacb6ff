"""The arguments of ``driftwell run``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import (
    add_no_pictures,
    add_output,
    add_settings,
    add_stop_after,
    add_threads,
)
from driftwell.cli.options.types import seed
from driftwell.exit_codes import ALL_LOST, NOT_CONTINUED, NOT_RECORDED, STOPPED

_TEXT = """\
Follows the charges of a scenario to its end, records what happens in a folder, prints the
answers to the scenario's questions with their errors, and draws pictures.

Given again, the same command goes on where a stop, a crash or a full disk ended it. Ctrl-C stops
it, and what is recorded stays.
"""
_EXAMPLES = (
    "driftwell run trap.toml",
    "driftwell run trap.toml -o night --stop-after 7h30m",
    'driftwell run trap.toml --seed 2 --set "duration=1 ms" -o second',
)
_CODES = {
    ALL_LOST: "",
    STOPPED: "",
    NOT_CONTINUED: "",
    NOT_RECORDED: "",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "run",
        "execute a scenario and answer its questions",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario file (TOML)")
    written = add_output(
        parser, "where to leave the record (default: the file's name with -run, here)"
    )
    written.add_argument(
        "--fresh",
        action="store_true",
        help="start over where a run was begun; the old one is kept under another name",
    )
    add_no_pictures(written)
    add_settings(parser).add_argument(
        "--seed", type=seed, metavar="N", help="seed instead of the scenario's own"
    )
    machine = add_threads(parser)
    add_stop_after(machine)
    machine.add_argument(
        "--force",
        action="store_true",
        help="begin even where memory or disk look too small, with a warning",
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Execute the scenario; returns the exit code."""
    from driftwell.cli.terminal.thread_limit import limited_threads

    threads = limited_threads(asked.threads)
    from driftwell.cli.runs.run import run_command

    settings = list(asked.settings)
    if asked.seed is not None:
        settings.append(f"seed={asked.seed}")
    return run_command(
        asked.file,
        asked.output,
        settings,
        threads,
        pictures=not asked.no_pictures,
        fresh=asked.fresh,
        stop_after=asked.stop_after,
        force=asked.force,
    )
