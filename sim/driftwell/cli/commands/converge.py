"""The arguments of ``driftwell converge``."""

from __future__ import annotations

import argparse
import re
from typing import Any

from driftwell.cli.options.shared import add_cluster, add_settings, add_side_by_side
from driftwell.cli.options.types import duration, folder

AXES = ("step", "coulomb", "field-map", "weight", "seeds")
MOST_REPLICAS = 1000
_EPILOG = """\
The judged run comes first and is common to all axes; then the cost of the others is said. What
is there already is not computed again; give the same command again after a stop or a crash.

axes: step (half and a quarter of it), coulomb (a tighter sum, direct where that is affordable),
field-map (solved fields and images finer), weight (more macro-charges at the same total charge),
seeds (replicas). Those that do not matter to the scenario are left out and named.

exit codes: 0 every run is there, and with --within every answer judged has converged; 2 the
scenario, the folder or the command line cannot be used; 4 stopped on request or by --stop-after,
the same command goes on; 7 some runs failed; 8 the cluster's scheduler is gone; 12 some answer has
not converged within the tolerance asked for; 130 interrupted at once; 1 a defect of driftwell
"""


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "converge",
        help="say how sure each answer is: repeat the run with everything numerical refined",
        epilog=_EPILOG,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("file", metavar="FILE", help="scenario file (TOML)")
    parser.add_argument(
        "-o",
        "--output",
        type=folder,
        metavar="FOLDER",
        help="where to leave runs and tables (default: the file's name with -converge, here)",
    )
    parser.add_argument(
        "--within",
        type=share,
        metavar="SHARE",
        help="tolerance of the combined error, e.g. 1%%; the exit code is the verdict",
    )
    parser.add_argument(
        "--question",
        action="append",
        default=[],
        metavar="NAME",
        help="judge this question by the tolerance, not all of them; may be repeated",
    )
    parser.add_argument(
        "--axes",
        type=axes,
        default=AXES,
        metavar="LIST",
        help=f"which axes, separated by commas (default: {','.join(AXES)})",
    )
    parser.add_argument(
        "--replicas",
        type=replicas,
        default=4,
        metavar="N",
        help="seeds in all, the scenario's own among them (default: %(default)d)",
    )
    add_side_by_side(parser)
    parser.add_argument(
        "--stop-after",
        type=duration,
        metavar="TIME",
        help="stop by the clock, e.g. after 7h30m; the same command then goes on",
    )
    parser.add_argument("--no-pictures", action="store_true", help="leave out the picture")
    add_cluster(parser)
    add_settings(parser)


def carry_out(asked: argparse.Namespace) -> int:
    """Repeat and judge; returns the exit code."""
    from pathlib import Path

    from driftwell.cli.converge import Options, converge_command
    from driftwell.cli.sweep_place import place_of
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
