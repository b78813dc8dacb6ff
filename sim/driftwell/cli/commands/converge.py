"""The arguments of ``driftwell converge``."""

from __future__ import annotations

import argparse
import re
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.shared import (
    add_cluster,
    add_no_pictures,
    add_output,
    add_settings,
    add_side_by_side,
    add_stop_after,
)
from driftwell.exit_codes import FINISHED, NOT_CONVERGED, SCHEDULER_GONE, SOME_FAILED, STOPPED

AXES = ("step", "coulomb", "field-map", "weight", "seeds")
MOST_REPLICAS = 1000

_TEXT = """\
Repeats a run with everything numerical refined, one thing after another, and says how much
each answer changes. The judged run comes first and is common to all axes; then the cost of the
others is said. What is there already is not computed again; give the same command again after a
stop or a crash.

Axes: step (half and a quarter of it), coulomb (a tighter sum, direct where that is affordable),
field-map (solved fields and images finer), weight (more macro-charges at the same total charge),
seeds (replicas). Those that do not matter to the scenario are left out and named.
"""
_EXAMPLES = (
    "driftwell converge trap.toml",
    "driftwell converge trap.toml --within 1% --question held",
    "driftwell converge trap.toml --axes step,seeds --replicas 8",
)
_CODES = {
    FINISHED: "every run is there, and with --within every answer judged has converged",
    STOPPED: "",
    SOME_FAILED: "some runs failed; the others are there",
    SCHEDULER_GONE: "",
    NOT_CONVERGED: "",
}


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "converge",
        "say how sure each answer is: repeat the run with everything numerical refined",
        _TEXT,
        _EXAMPLES,
        _CODES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", metavar="FILE", help="scenario file (TOML)")
    written = add_output(
        parser, "where to leave runs and tables (default: the file's name with -converge, here)"
    )
    add_no_pictures(written, "picture")
    judged = parser.add_argument_group("what is judged, and how")
    judged.add_argument(
        "--within",
        type=share,
        metavar="SHARE",
        help="tolerance of the combined error, e.g. 1%%; the exit code is the verdict",
    )
    judged.add_argument(
        "--question",
        action="append",
        default=[],
        metavar="NAME",
        help="judge this question by the tolerance, not all of them; may be repeated",
    )
    judged.add_argument(
        "--axes",
        type=axes,
        default=AXES,
        metavar="LIST",
        help=f"which axes, separated by commas (default: {','.join(AXES)})",
    )
    judged.add_argument(
        "--replicas",
        type=replicas,
        default=4,
        metavar="N",
        help="seeds in all, the scenario's own among them (default: %(default)d)",
    )
    add_settings(parser)
    add_stop_after(add_side_by_side(parser))
    add_cluster(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Repeat and judge; returns the exit code."""
    from pathlib import Path

    from driftwell.cli.studies.converge import Options, converge_command
    from driftwell.cli.studies.place import place_of
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
        place_of(asked),
    )


def share(text: str) -> float:
    """A tolerance: ``1%``, ``0.5 %`` or ``0.01``."""
    found = re.fullmatch(r"\s*(\d*\.?\d+(?:[eE][-+]?\d+)?)\s*(%?)\s*", text, re.ASCII)
    value = float(found[1]) / (100.0 if found[2] else 1.0) if found else 0.0
    if not 0.0 < value < 1.0:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is no share between 0 and 1; needs one such as 1% or 0.01"
        )
    return value


def axes(text: str) -> tuple[str, ...]:
    """Names of axes, each once, in their own order."""
    named = [name.strip().replace("_", "-") for name in text.split(",")]
    for name in named:
        if name not in AXES:
            raise argparse.ArgumentTypeError(
                f"{name[:40]!r} is no axis; needs some of {', '.join(AXES)}, separated by commas"
            )
    return tuple(name for name in AXES if name in named)


def replicas(text: str) -> int:
    """A number of seeds."""
    if not text.isascii() or not text.isdigit() or not 1 <= int(text[:9]) <= MOST_REPLICAS:
        raise argparse.ArgumentTypeError(
            f"{text[:40]!r} is not a whole number from 1 to {MOST_REPLICAS}"
        )
    return int(text)
