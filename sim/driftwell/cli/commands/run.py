"""The arguments of ``driftwell run``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.shared import add_settings, add_threads
from driftwell.cli.options.types import duration, folder, seed


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "run", help="execute a scenario and answer its questions"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", help="scenario file (TOML)")
    parser.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help="where to leave the record (default: the file's name with -run, here)",
    )
    add_threads(parser)
    parser.add_argument("--seed", type=seed, metavar="N", help="seed instead of the scenario's own")
    parser.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    parser.add_argument(
        "--fresh",
        action="store_true",
        help="start over where a run was begun; the old one is kept under another name",
    )
    parser.add_argument(
        "--stop-after",
        type=duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )
    parser.add_argument(
        "--force",
        action="store_true",
        help="begin even where memory or disk look too small, with a warning",
    )
    add_settings(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Execute the scenario; returns the exit code."""
    from driftwell.cli.thread_limit import limited_threads

    threads = limited_threads(asked.threads)
    from driftwell.cli.run_command import run_command

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
