"""The ``driftwell`` command: arguments, and which command they mean.

Nothing heavy is imported before it is known what is asked, so that ``--help`` answers at once.
"""

from __future__ import annotations

import argparse
import gc
import os
import sys
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager, nullcontext
from typing import Any

from driftwell._version import __version__
from driftwell.cli.converge_arguments import add_converge
from driftwell.cli.durations import seconds_of
from driftwell.cli.printing import flush_quietly, tell, write_anything

INTERRUPTED = 130
DEFECT = 1
LARGEST_SEED = 2**63 - 1
MOST_THREADS = 1024
SHORTEST_TIMING, TIMING, LONGEST_TIMING = 0.1, 5.0, 3600.0
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

TRACEBACK = "DRIFTWELL_TRACEBACK"
"""Environment variable that lets a defect of driftwell show where it is."""

_EXIT_CODES = """\
exit codes: 0 finished; 2 the scenario, the folder or the command line cannot be used;
3 every charge was lost; 4 stopped on request or by --stop-after, the same command goes on;
5 the motion could not be continued; 6 the disk refused the record, the same command goes on;
130 interrupted at once; 1 a defect of driftwell
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
    run.add_argument(
        "-o",
        "--output",
        type=_folder,
        metavar="FOLDER",
        help="where to leave the record (default: the file's name with -run, here)",
    )
    _add_threads(run)
    run.add_argument("--seed", type=_seed, metavar="N", help="seed instead of the scenario's own")
    run.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    run.add_argument(
        "--fresh",
        action="store_true",
        help="start over where a run was begun; the old one is kept under another name",
    )
    run.add_argument(
        "--stop-after",
        type=_duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )
    run.add_argument(
        "--force",
        action="store_true",
        help="begin even where memory or disk look too small, with a warning",
    )
    _add_settings(run)

    sweep = commands.add_parser(
        "sweep",
        help="compute all runs of a study that are not there yet",
        epilog=_SWEEP_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    _add_study_options(sweep, "sweep")

    _add_limit(commands)

    converge = add_converge(commands, _folder, _threads, _duration)
    _add_cluster(converge)
    _add_settings(converge)

    check = commands.add_parser(
        "check", help="say what a scenario or study would simulate, or its faults"
    )
    check.add_argument("file", help="scenario or study file (TOML)")
    _add_settings(check)

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
        type=_seconds,
        metavar="S",
        help=f"how long to time with --measure, about (default: {TIMING:g})",
    )
    _add_threads(estimate)
    _add_settings(estimate)

    fields = commands.add_parser(
        "fields", help="solve the field of a scenario's electrodes, tell and draw it"
    )
    fields.add_argument("file", help="scenario file (TOML)")
    fields.add_argument(
        "-o",
        "--output",
        type=_folder,
        metavar="FOLDER",
        help="where to leave the pictures (default: the file's name with -fields, here)",
    )
    fields.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    _add_threads(fields)
    _add_settings(fields)

    watch = commands.add_parser("watch", help="show how far a run or a sweep is")
    watch.add_argument("folder", metavar="FOLDER", help="a run's folder, or a sweep's")
    watch.add_argument("--once", action="store_true", help="show it once, as text")

    info = commands.add_parser("info", help="summarise a run's folder")
    info.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")

    commands.add_parser("schema", help="print the JSON Schema of scenario files, for editors")
    return parser


def _add_limit(commands: Any) -> None:
    limit = commands.add_parser(
        "limit",
        help="find the value of a key at which an answer crosses a threshold",
        epilog=_LIMIT_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    _add_study_options(limit, "limit")


def _add_study_options(parser: argparse.ArgumentParser, what: str) -> None:
    parser.add_argument("study", metavar="STUDY", help="study file (TOML)")
    parser.add_argument(
        "-o",
        "--output",
        type=_folder,
        metavar="FOLDER",
        help=f"the {what}'s folder (default: the file's name with -{what}, here)",
    )
    parser.add_argument(
        "--workers",
        type=_threads,
        metavar="N",
        help="runs side by side (default: by number of runs, cores, charges and memory)",
    )
    parser.add_argument(
        "--threads",
        type=_threads,
        metavar="N",
        help="threads of each run (default: as for --workers)",
    )
    parser.add_argument(
        "--retry-failed",
        action="store_true",
        help="start over the runs whose motion could not be continued",
    )
    parser.add_argument("--no-pictures", action="store_true", help="leave out the pictures")
    _add_cluster(parser)
    _add_settings(parser)


def _add_cluster(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--on", choices=("dask",), help="compute on a cluster (needs the cluster extra)"
    )
    parser.add_argument(
        "--scheduler", metavar="ADDRESS", help="of the cluster, e.g. tcp://192.0.2.1:8786"
    )
    for option, what in (
        ("--tls-ca", "certificate of the cluster's authority"),
        ("--tls-cert", "certificate to show to the cluster"),
        ("--tls-key", "its key"),
    ):
        parser.add_argument(option, type=_file, metavar="FILE", help=f"{what} (PEM)")


def _add_threads(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--threads",
        type=_threads,
        metavar="N",
        help="threads (default: NUMBA_NUM_THREADS where it is set, else one for each core)",
    )


def _add_settings(parser: argparse.ArgumentParser) -> None:
    parser.add_argument(
        "--set",
        action="append",
        default=[],
        dest="settings",
        metavar="KEY=VALUE",
        help='a key of the scenario, e.g. --set cloud.load.count=500 --set "duration=1 ms"',
    )


def _whole(text: str, least: int, most: int) -> int:
    try:
        number = int(text)
    except ValueError:
        number = least - 1
    if not least <= number <= most:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is not a whole number from {least} to {most}"
        )
    return number


def _threads(text: str) -> int:
    return _whole(text, 1, MOST_THREADS)


def _seed(text: str) -> int:
    return _whole(text, 0, LARGEST_SEED)


def _duration(text: str) -> float:
    try:
        return seconds_of(text)
    except ValueError as fault:
        raise argparse.ArgumentTypeError(str(fault)) from None


def _seconds(text: str) -> float:
    try:
        number = float(text)
    except ValueError:
        number = 0.0
    if not SHORTEST_TIMING <= number <= LONGEST_TIMING:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is not a number of seconds from {SHORTEST_TIMING:g} to "
            f"{LONGEST_TIMING:g}"
        )
    return number


def _file(text: str) -> str:
    if not text.strip():
        raise argparse.ArgumentTypeError("needs the name of a file")
    return text


def _folder(text: str) -> str:
    if not text.strip():
        raise argparse.ArgumentTypeError("needs the name of a folder")
    return text


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns its exit code."""
    write_anything()
    try:
        return _answered(arguments)
    finally:
        flush_quietly()


def _answered(arguments: Sequence[str] | None) -> int:
    """The exit code of the command; errors and defects have been told."""
    parser = _parser()
    asked = parser.parse_args(arguments)
    if asked.command == "estimate" and asked.seconds is not None and not asked.measure:
        parser.error("--seconds says how long --measure times: give --measure too")
    try:
        with warnings.catch_warnings():
            if not sys.warnoptions:  # meant for whoever works on the libraries, not for the user
                warnings.simplefilter("ignore")
            return _carry_out(asked)
    except KeyboardInterrupt:
        tell("driftwell: interrupted; nothing is running any more.")
        return INTERRUPTED
    except Exception as defect:
        if os.environ.get(TRACEBACK):
            raise
        tell(
            f"driftwell: this is a defect of driftwell {__version__}, please report it with the "
            f"command and the scenario: {type(defect).__name__}: {defect}\n"
            f"Setting {TRACEBACK}=1 shows where it happened."
        )
        return DEFECT


@contextmanager
def _uncollected() -> Iterator[None]:
    """Without looking for garbage: in what is short, most is still in use, and it takes a tenth."""
    before = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if before:
            gc.enable()


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
    if asked.command == "watch":
        from driftwell.cli.watch import watch

        return watch(asked.folder, asked.once)
    if asked.command in ("sweep", "limit"):
        from driftwell.cli.limit import limit_command
        from driftwell.cli.sweep import sweep_command
        from driftwell.cli.sweep_place import Place

        command = sweep_command if asked.command == "sweep" else limit_command
        return command(
            asked.study,
            asked.output,
            asked.settings,
            asked.workers,
            asked.threads,
            asked.retry_failed,
            not asked.no_pictures,
            Place(asked.on, asked.scheduler, asked.tls_ca, asked.tls_cert, asked.tls_key),
        )
    if asked.command == "converge":
        return _converge(asked)
    threads = _usable_threads(asked.threads)
    if "numba" not in sys.modules:  # it reads its limit once, and minds another one later
        os.environ["NUMBA_NUM_THREADS"] = str(threads)
    if asked.command == "estimate":
        with nullcontext() if asked.measure else _uncollected():
            from driftwell.cli.estimate import estimate_command

            seconds = (asked.seconds or TIMING) if asked.measure else None
            return estimate_command(asked.file, asked.settings, threads, seconds)
    if asked.command == "fields":
        from driftwell.cli.fields import fields_command

        return fields_command(
            asked.file, asked.output, asked.settings, threads, pictures=not asked.no_pictures
        )
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


def _converge(asked: argparse.Namespace) -> int:
    from pathlib import Path

    from driftwell.cli.converge import Options, converge_command
    from driftwell.cli.sweep_place import Place
    from driftwell.study.convergence.plan import Wanted

    axes = tuple(name.replace("-", "_") for name in asked.axes)
    return converge_command(
        Wanted(Path(asked.file), tuple(asked.settings), axes, asked.replicas),
        asked.output,
        Options(
            asked.within,
            tuple(asked.question),
            asked.workers,
            asked.threads,
            asked.stop_after,
            asked.retry_failed,
            not asked.no_pictures,
        ),
        Place(asked.on, asked.scheduler, asked.tls_ca, asked.tls_cert, asked.tls_key),
    )


def _usable_threads(asked: int | None) -> int:
    """The number of threads: as asked, as the environment says, or one for each core."""
    cores = len(os.sched_getaffinity(0))
    if asked is None:
        try:
            return _threads(os.environ.get("NUMBA_NUM_THREADS", ""))
        except argparse.ArgumentTypeError:
            return cores
    if asked > cores:
        tell(f"{asked} threads on {cores} core{'s' * (cores != 1)}: no faster than {cores}.")
    return asked
