"""The arguments of ``driftwell estimate``."""

from __future__ import annotations

import argparse
import atexit
import gc
from collections.abc import Iterator
from contextlib import contextmanager, nullcontext
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import add_settings, add_threads
from driftwell.cli.options.types import TIMING, seconds

_TEXT = """\
Counts charges, steps and records, says what memory and disk they take, and what hand
calculations expect, within seconds. With --measure the first steps are really taken and timed, and
what the whole will take is said with its bounds.
"""
_EXAMPLES = (
    "driftwell estimate trap.toml",
    "driftwell estimate trap.toml --measure",
    "driftwell estimate sweep.toml --measure --seconds 10",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "estimate",
        "say what a run or a sweep will be: counts, hand calculations; --measure: its time",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out, parser=parser)
    parser.add_argument("file", help="scenario or study file (TOML)")
    timed = parser.add_argument_group("timing")
    timed.add_argument(
        "--measure", action="store_true", help="time the first steps, and say what all will take"
    )
    timed.add_argument(
        "--seconds",
        type=seconds,
        metavar="S",
        help=f"how long to time with --measure, about (default: {TIMING:g})",
    )
    add_settings(parser)
    add_threads(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Count, work out and perhaps time; returns the exit code."""
    if asked.seconds is not None and not asked.measure:
        asked.parser.error("--seconds says how long --measure times: give --measure too")
    from driftwell.cli.terminal.thread_limit import limited_threads

    threads = limited_threads(asked.threads)
    with nullcontext() if asked.measure else _uncollected():
        from driftwell.cli.runs.estimate import estimate_command

        timed = (asked.seconds or TIMING) if asked.measure else None
        return estimate_command(asked.file, asked.settings, threads, timed)


@contextmanager
def _uncollected() -> Iterator[None]:
    """Without looking for garbage, now and as the program ends.

    In what is short nearly all is still in use: looking takes a tenth on the way, and at the end
    another 0.5 s for what the system takes back at once.
    """
    before = gc.isenabled()
    gc.disable()
    atexit.register(gc.freeze)
    try:
        yield
    finally:
        if before:
            gc.enable()
