"""The ``driftwell`` command: arguments, and which command they mean.

Nothing heavy is imported before it is known what is asked, so that ``--help`` answers at once.
"""

from __future__ import annotations

import argparse
import os
import sys
from collections.abc import Sequence

from driftwell._version import __version__

_EXIT_CODES = """\
exit codes: 0 finished; 2 the scenario, the folder or the command line cannot be used;
3 every charge was lost; 4 stopped on request, go on later; 5 the motion could not be continued
"""


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(
        prog="driftwell",
        description="How many charges is too many? Follows charged particles under their own "
        "repulsion in traps and beam lines, keeps the account, and answers with error bars.",
        epilog=_EXIT_CODES,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.add_argument("--version", action="version", version=f"driftwell {__version__}")
    commands = parser.add_subparsers(dest="command", metavar="COMMAND", required=True)

    run = commands.add_parser("run", help="execute a scenario and answer its questions")
    run.add_argument("file", help="scenario file (TOML)")
    run.add_argument("-o", "--output", metavar="FOLDER", help="where to leave the record")
    run.add_argument("--threads", type=_threads, metavar="N", help="threads (default: all cores)")
    run.add_argument("--seed", type=int, metavar="N", help="seed instead of the scenario's own")
    run.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    _add_settings(run)

    check = commands.add_parser("check", help="say what a scenario would simulate, or its faults")
    check.add_argument("file", help="scenario file (TOML)")
    _add_settings(check)

    info = commands.add_parser("info", help="summarise a run's folder")
    info.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")

    commands.add_parser("schema", help="print the JSON Schema of scenario files, for editors")
    return parser


def _add_settings(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--set",
        action="append",
        default=[],
        dest="settings",
        metavar="KEY=VALUE",
        help='a key of the scenario, e.g. --set cloud.load.count=500 --set "duration=1 ms"',
    )


def _threads(text: str) -> int:
    count = int(text)
    if not 1 <= count <= 1024:
        raise argparse.ArgumentTypeError("must be between 1 and 1024")
    return count


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns its exit code."""
    asked = _parser().parse_args(arguments)
    try:
        return _carry_out(asked)
    except KeyboardInterrupt:
        print("driftwell: interrupted; nothing is running any more.", file=sys.stderr)
        return 130
    except BrokenPipeError:
        # the reader of our output left; say nothing to the broken pipe at exit either
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 0


def _carry_out(asked: argparse.Namespace) -> int:
    if asked.command == "check":
        from driftwell.cli.check import check

        return check(asked.file, asked.settings)
    if asked.command == "schema":
        from driftwell.cli.schema import schema

        return schema()
    if asked.command == "info":
        from driftwell.cli.info import info

        return info(asked.run)
    threads = asked.threads or len(os.sched_getaffinity(0))
    os.environ["NUMBA_NUM_THREADS"] = str(threads)  # read once, when numba is imported
    from driftwell.cli.run_command import run_command

    settings = list(asked.settings)
    if asked.seed is not None:
        settings.append(f"seed={asked.seed}")
    return run_command(asked.file, asked.output, settings, threads, not asked.no_pictures)
