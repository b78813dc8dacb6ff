"""The ``driftwell`` command: which command the arguments mean, its exit code.

Nothing heavy is imported before it is known what is asked, so that ``--help`` answers at once.
"""

from __future__ import annotations

import argparse
import atexit
import gc
import os
import sys
import warnings
from collections.abc import Iterator, Sequence
from contextlib import contextmanager, nullcontext

from driftwell._version import __version__
from driftwell.cli.argument_types import TIMING
from driftwell.cli.argument_types import threads as number_of_threads
from driftwell.cli.arguments import parser
from driftwell.cli.printing import flush_quietly, tell, write_anything

INTERRUPTED = 130
DEFECT = 1

TRACEBACK = "DRIFTWELL_TRACEBACK"
"""Environment variable that lets a defect of driftwell show where it is."""


def main(arguments: Sequence[str] | None = None) -> int:
    """Run the command; returns its exit code."""
    write_anything()
    try:
        return _answered(arguments)
    finally:
        flush_quietly()


def _answered(arguments: Sequence[str] | None) -> int:
    """The exit code of the command; errors and defects have been told."""
    line = parser()
    asked = line.parse_args(arguments)
    if asked.command == "estimate" and asked.seconds is not None and not asked.measure:
        line.error("--seconds says how long --measure times: give --measure too")
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


def _carry_out(asked: argparse.Namespace) -> int:
    if asked.command == "check":
        from driftwell.cli.check import check

        return check(asked.file, asked.settings)
    if asked.command == "schema":
        from driftwell.cli.schema import schema

        return schema(asked.study)
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
            return number_of_threads(os.environ.get("NUMBA_NUM_THREADS", ""))
        except argparse.ArgumentTypeError:
            return cores
    if asked > cores:
        tell(f"{asked} threads on {cores} core{'s' * (cores != 1)}: no faster than {cores}.")
    return asked
