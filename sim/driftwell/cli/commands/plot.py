"""The arguments of ``driftwell plot``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.types import file

FORMATS = ("png", "svg", "pdf")
STRETCH = 'limits, such as "-2 mm..2 mm"'

_TEXT = """\
Draws one figure at the size it is printed. --list says which figures a run can give, which
options each takes, and why others cannot be drawn.
"""
_EXAMPLES = (
    "driftwell plot trap-run --list",
    "driftwell plot trap-run phase-space --axis x --at end",
    "driftwell plot trap-run projections -o cloud.svg --width page",
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "plot",
        "draw one figure of a run for a paper, as PNG, SVG or PDF",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")
    parser.add_argument(
        "what", metavar="WHAT", nargs="?", help="which figure; --list says what there is"
    )
    parser.add_argument(
        "--list", action="store_true", help="say which figures the run can give, and why not others"
    )
    written = parser.add_argument_group("what is written")
    written.add_argument(
        "-o",
        "--output",
        type=file,
        metavar="FILE",
        help="file to write; its ending says the format (default: RUN-WHAT.pdf, here)",
    )
    written.add_argument(
        "--as", dest="form", choices=FORMATS, help="the format, whatever the file's ending"
    )
    drawn = parser.add_argument_group("what is drawn")
    drawn.add_argument(
        "--of", action="append", default=[], metavar="CLOUD", help="only this cloud (again: more)"
    )
    drawn.add_argument("--at", metavar="TIME", help='start, end, or a time such as "35 us"')
    drawn.add_argument("--axis", metavar="AXIS", help="x, y or z")
    drawn.add_argument("--plane", metavar="PLANE", help="axes across and up, such as zx")
    drawn.add_argument(
        "--through", metavar="PLACE", default=0.0, help="where the plane cuts the third axis"
    )
    drawn.add_argument("--detector", metavar="NAME", help="which detector")
    drawn.add_argument("--trace", metavar="NAME", help="which traced coordinate")
    look = parser.add_argument_group("how it is drawn")
    look.add_argument("--across", metavar="A..B", help=f"{STRETCH}; write --across=-2mm..2mm")
    look.add_argument("--up", metavar="A..B", help=STRETCH)
    look.add_argument(
        "--width", metavar="W", help='column (85 mm), page (175 mm), or a length such as "120 mm"'
    )
    look.add_argument("--height", metavar="H", help="a length; left out: what suits the figure")
    look.add_argument("--title", action="store_true", help="put the run's title above")


def carry_out(asked: argparse.Namespace) -> int:
    """Draw it; returns the exit code."""
    from driftwell.cli.plot import list_command, plot_command

    if asked.list:
        return list_command(asked.run)
    return plot_command(asked)
