"""The arguments of ``driftwell sweep``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.shared import add_study_options
from driftwell.cli.options.types import duration

_EPILOG = """\
What is there already is not computed again; what was cut off goes on. Give the same command
again after a stop, a crash or a change of the study.

exit codes: 0 every run is there (finished, or every charge lost); 2 the study, the folder or
the command line cannot be used; 4 stopped on request or by --stop-after, the same command goes
on; 7 some runs failed, the summary says which and why; 8 the cluster's scheduler is gone, the
same command goes on; 130 interrupted at once; 1 a defect of driftwell
"""


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "sweep",
        help="compute all runs of a study that are not there yet",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.set_defaults(carry_out=carry_out)
    add_study_options(parser, "sweep")
    parser.add_argument(
        "--stop-after",
        type=duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Compute the runs; returns the exit code."""
    from driftwell.cli.sweep import sweep_command
    from driftwell.cli.sweep_place import place_of

    return sweep_command(
        asked.study,
        asked.output,
        asked.settings,
        asked.workers,
        asked.threads,
        asked.retry_failed,
        not asked.no_pictures,
        place_of(asked),
        asked.stop_after,
    )
