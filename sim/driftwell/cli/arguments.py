"""All commands and their arguments.

Nothing heavy is imported here: ``--help`` answers at once.
"""

from __future__ import annotations

import argparse

from driftwell._version import __version__
from driftwell.cli.argument_types import TIMING, duration, folder, seconds, seed
from driftwell.cli.converge_arguments import add_converge
from driftwell.cli.shared_arguments import (
    add_settings,
    add_study_options,
    add_threads,
)

_EXIT_CODES = """\
exit codes: 0 finished; 2 the scenario, the folder or the command line cannot be used;
3 every charge was lost; 4 stopped on request or by --stop-after, the same command goes on;
5 the motion could not be continued; 6 the disk refused the record, the same command goes on;
130 interrupted at once; 1 a defect of driftwell
"""

_SWEEP_EPILOG = """\
What is there already is not computed again; what was cut off goes on. Give the same command
again after a stop, a crash or a change of the study.

exit codes: 0 every run is there (finished, or every charge lost); 2 the study, the folder or
the command line cannot be used; 4 stopped on request, the same command goes on; 7 some runs
failed, the summary says which and why; 8 the cluster's scheduler is gone, the same command
goes on; 130 interrupted at once; 1 a defect of driftwell
"""

_LIMIT_EPILOG = """\
The study file says what is limited in its [limit]. Runs that are there already are not computed
again; give the same command again after a stop, a crash or a change of the study.

exit codes: 0 the interval is as narrow as asked; 2 the study, the folder or the command line
cannot be used; 4 stopped on request, the same command goes on; 7 too many runs failed; 8 the
cluster's scheduler is gone, the same command goes on; 9 no crossing; 10 several crossings;
11 noise too large, or the runs allowed were too few; 130 interrupted at once; 1 a defect of
driftwell
"""


def parser() -> argparse.ArgumentParser:
    """The whole command line."""
    whole = argparse.ArgumentParser(
        prog="driftwell",
        description="How many charges is too many? Follows charged particles under their own "
        "repulsion in traps and beam lines, keeps the account, and answers with error bars.",
        epilog=_EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    whole.add_argument("--version", action="version", version=f"driftwell {__version__}")
    commands = whole.add_subparsers(dest="command", metavar="COMMAND", required=True)

    run = commands.add_parser("run", help="execute a scenario and answer its questions")
    run.add_argument("file", help="scenario file (TOML)")
    run.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help="where to leave the record (default: the file's name with -run, here)",
    )
    add_threads(run)
    run.add_argument("--seed", type=seed, metavar="N", help="seed instead of the scenario's own")
    run.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    run.add_argument(
        "--fresh",
        action="store_true",
        help="start over where a run was begun; the old one is kept under another name",
    )
    run.add_argument(
        "--stop-after",
        type=duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )
    run.add_argument(
        "--force",
        action="store_true",
        help="begin even where memory or disk look too small, with a warning",
    )
    add_settings(run)

    sweep = commands.add_parser(
        "sweep",
        help="compute all runs of a study that are not there yet",
        epilog=_SWEEP_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    add_study_options(sweep, "sweep")

    limit = commands.add_parser(
        "limit",
        help="find the value of a key at which an answer crosses a threshold",
        epilog=_LIMIT_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    add_study_options(limit, "limit")

    add_converge(commands)

    check = commands.add_parser(
        "check", help="say what a scenario or study would simulate, or its faults"
    )
    check.add_argument("file", help="scenario or study file (TOML)")
    add_settings(check)

    estimate = commands.add_parser(
        "estimate",
        help="say what a run or a sweep will be: counts, hand calculations; --measure: its time",
    )
    estimate.add_argument("file", help="scenario or study file (TOML)")
    estimate.add_argument(
        "--measure", action="store_true", help="time the first steps, and say what all will take"
    )
    estimate.add_argument(
        "--seconds",
        type=seconds,
        metavar="S",
        help=f"how long to time with --measure, about (default: {TIMING:g})",
    )
    add_threads(estimate)
    add_settings(estimate)

    fields = commands.add_parser(
        "fields", help="solve the field of a scenario's electrodes, tell and draw it"
    )
    fields.add_argument("file", help="scenario file (TOML)")
    fields.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help="where to leave the pictures (default: the file's name with -fields, here)",
    )
    fields.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    add_threads(fields)
    add_settings(fields)

    watch = commands.add_parser("watch", help="show how far a run or a sweep is")
    watch.add_argument("folder", metavar="FOLDER", help="a run's folder, or a sweep's")
    watch.add_argument("--once", action="store_true", help="show it once, as text")

    info = commands.add_parser("info", help="summarise a run's folder")
    info.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")

    schema = commands.add_parser(
        "schema", help="print the JSON Schema of scenario or study files, for editors"
    )
    schema.add_argument(
        "--study", action="store_true", help="of study files, with [[vary]], [sample] and [limit]"
    )
    return whole
