"""``driftwell plot RUN WHAT``: one figure of a run in a file."""

from __future__ import annotations

import argparse
import logging
from pathlib import Path

from driftwell.cli.terminal.printing import answer, tell
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.record.reader import Run, open_run


def plot_command(asked: argparse.Namespace) -> int:
    """Draw and write the figure and say where it is, or why there is none; the exit code."""
    from driftwell.report.figures.drawing import figure
    from driftwell.report.figures.image_file import format_of, image, write_image
    from driftwell.report.figures.options import FigureError, FigureOptions

    logging.getLogger("matplotlib").setLevel(logging.ERROR)
    try:
        run = open_run(asked.run)
        if asked.what is None:
            raise FigureError(
                f"{asked.run}: which figure? `driftwell plot {asked.run} --list` says which there "
                "are."
            )
        path = _file(run, asked)
        form = format_of(path, asked.form)
        options = FigureOptions(
            of=tuple(asked.of),
            at=asked.at,
            axis=asked.axis,
            plane=asked.plane,
            through=asked.through,
            detector=asked.detector,
            trace=asked.trace,
            across=asked.across,
            up=asked.up,
            width=asked.width,
            height=asked.height,
            title=asked.title,
        )
        made = figure(run, asked.what, options)
        write_image(path, image(made, form, run, asked.what))
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    wide, high = (25.4 * side for side in made.get_size_inches())
    return (
        FINISHED if answer([f"{asked.what}: {path} ({wide:.0f} mm by {high:.0f} mm)"]) else UNUSABLE
    )


def list_command(path: str) -> int:
    """Say which figures the run can give; the exit code."""
    from driftwell.report.figures.drawing import offers

    try:
        found = offers(open_run(path))
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    wide = max(len(offer.name) for offer in found)
    lines = []
    for offer in found:
        if offer.missing:
            lines.append(f"{offer.name:{wide}}  not of this run: {offer.missing}")
        else:
            options = " ".join(f"--{name}" for name in offer.takes)
            lines.append(f"{offer.name:{wide}}  {offer.words} ({options})")
    return FINISHED if answer(lines) else UNUSABLE


def _file(run: Run, asked: argparse.Namespace) -> Path:
    """The file to write."""
    if asked.output is not None:
        return Path(asked.output)
    return Path(f"{run.folder.resolve().name}-{asked.what}.{asked.form or 'pdf'}")
