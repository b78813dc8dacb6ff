"""The arguments of ``driftwell export``."""

from __future__ import annotations

import argparse
from typing import Any

from driftwell.cli.options.command import add_command
from driftwell.cli.options.types import file
from driftwell.exports.names import FORMATS, TABLES

_TEXT = """\
Writes what a run recorded for other programs. openPMD is an open standard for particles; CSV
and Parquet are tables; VTK is for general viewers. Parquet and VTK need an extra, which is named
where it is missing.
"""
_EXAMPLES = (
    "driftwell export trap-run openpmd",
    "driftwell export trap-run csv --what answers ledger -o tables",
    'driftwell export trap-run vtk --times "10 us..20 us"',
)


def add(commands: Any) -> None:
    """Add the command."""
    parser = add_command(
        commands,
        "export",
        "write a run as openPMD, CSV, Parquet or VTK",
        _TEXT,
        _EXAMPLES,
    )
    parser.set_defaults(carry_out=carry_out)
    parser.add_argument("run", metavar="RUN", help="a run's folder, or its run.h5")
    parser.add_argument("format", choices=FORMATS, help="what to write")
    parser.add_argument(
        "-o",
        "--output",
        type=file,
        metavar="PATH",
        help="file or folder to write (default: the run's name with the format's, here)",
    )
    parser.add_argument(
        "--what",
        nargs="+",
        default=[],
        choices=TABLES,
        metavar="PART",
        help=f"parts of the run (default: what is usual): {', '.join(TABLES)}",
    )
    parser.add_argument(
        "--times",
        nargs="+",
        default=[],
        metavar="TIME",
        help='start, end, "20 us" or "10 us..20 us" (default: all)',
    )
    parser.add_argument(
        "--author", default="", metavar="TEXT", help="who answers for the data, noted in the file"
    )


def carry_out(asked: argparse.Namespace) -> int:
    """Write it; returns the exit code."""
    from driftwell.cli.export import export_command

    return export_command(
        asked.run, asked.format, asked.output, asked.what, asked.times, asked.author
    )
