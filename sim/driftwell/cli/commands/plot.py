"""The arguments of ``driftwell plot``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.types import file

FORMATS = ("png", "svg", "pdf")
STRETCH = 'limits, such as "-2 mm..2 mm"'


def add(commands: Any) -> None:
    """Add the command."""
    parser: argparse.ArgumentParser = commands.add_parser(
        "plot", help="draw one figure of a run for a paper, as PNG, SVG or PDF"
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")
    parser.add_argument(
        "what", metavar="WHAT", nargs="?", help="which figure; --list says what there is"
    )
    parser.add_argument(
        "--list", action="store_true", help="say which figures the run can give, and why not others"
    )
    parser.add_argument(
        "-o",
        "--output",
        type=file,
        metavar="FILE",
        help="file to write; its ending says the format (default: RUN-WHAT.pdf, here)",
    )
    parser.add_argument(
        "--as", dest="form", choices=FORMATS, help="the format, whatever the file's ending"
    )
    parser.add_argument(
        "--of", action="append", default=[], metavar="CLOUD", help="only this cloud (again: more)"
    )
    parser.add_argument("--at", metavar="TIME", help='start, end, or a time such as "35 us"')
    parser.add_argument("--axis", metavar="AXIS", help="x, y or z")
    parser.add_argument("--plane", metavar="PLANE", help="axes across and up, such as zx")
    parser.add_argument(
        "--through", metavar="PLACE", default=0.0, help="where the plane cuts the third axis"
    )
    parser.add_argument("--detector", metavar="NAME", help="which detector")
    parser.add_argument("--trace", metavar="NAME", help="which traced coordinate")
    parser.add_argument("--across", metavar="A..B", help=f"{STRETCH}; write --across=-2mm..2mm")
    parser.add_argument("--up", metavar="A..B", help=STRETCH)
    parser.add_argument(
        "--width", metavar="W", help='column (85 mm), page (175 mm), or a length such as "120 mm"'
    )
    parser.add_argument("--height", metavar="H", help="a length; left out: what suits the figure")
    parser.add_argument("--title", action="store_true", help="put the run's title above")


def carry_out(asked: argparse.Namespace) -> int:
    """Draw it; returns the exit code."""
    from driftwell.cli.plot import list_command, plot_command

    if asked.list:
        return list_command(asked.run)
    return plot_command(asked)
