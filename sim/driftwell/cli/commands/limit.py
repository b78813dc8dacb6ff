"""The arguments of ``driftwell limit``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.shared import add_study_options

_EPILOG = """\
The study file says what is limited in its [limit]. Runs that are there already are not computed
again; give the same command again after a stop, a crash or a change of the study.

exit codes: 0 the interval is as narrow as asked; 2 the study, the folder or the command line
cannot be used; 4 stopped on request, the same command goes on; 7 too many runs failed; 8 the
cluster's scheduler is gone, the same command goes on; 9 no crossing; 10 several crossings;
11 noise too large, or the runs allowed were too few; 130 interrupted at once; 1 a defect of
driftwell
"""


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "limit",
        help="find the value of a key at which an answer crosses a threshold",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.set_defaults(carry_out=carry_out)
    add_study_options(parser, "limit")


def carry_out(asked: argparse.Namespace) -> int:
    """Find the value; returns the exit code."""
    from driftwell.cli.limit import limit_command
    from driftwell.cli.sweep_place import place_of

    return limit_command(
        asked.study,
        asked.output,
        asked.settings,
        asked.workers,
        asked.threads,
        asked.retry_failed,
        not asked.no_pictures,
        place_of(asked),
    )
