"""The arguments of ``driftwell movie``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.types import file

_TEXT = """\
Shows the tracked charges of a run moving, in one plane or several side by side, among the
outlines of electrodes and walls. MP4 needs the program ffmpeg; without it a GIF is written.
"""
_EXAMPLES = (
    "driftwell movie trap-run",
    "driftwell movie trap-run -o trap.gif --seconds 4 --plane zx",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "movie",
        "show a run as a movie, MP4 or GIF",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")
    parser.add_argument(
        "-o",
        "--output",
        type=file,
        metavar="FILE",
        help="file to write, .mp4 or .gif (default: RUN.mp4 here, RUN.gif without an encoder)",
    )
    parser.add_argument(
        "--seconds", type=float, default=10.0, metavar="S", help="length (default: 10)"
    )
    parser.add_argument(
        "--frames-per-second", type=float, default=25.0, metavar="N", help="(default: 25)"
    )
    parser.add_argument(
        "--plane",
        default="zx,zy,xy",
        metavar="PLANES",
        help="planes side by side, axes across and up (default: zx,zy,xy)",
    )
    parser.add_argument(
        "--dots", type=int, default=5000, metavar="N", help="charges at the most (default: 5000)"
    )
    parser.add_argument(
        "--height", type=int, default=480, metavar="N", help="dots high (default: 480)"
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Make it; returns the exit code."""
    from driftwell.cli.movie import movie_command

    return movie_command(asked)
