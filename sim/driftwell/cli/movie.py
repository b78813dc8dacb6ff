"""``driftwell movie RUN``: a run as a movie, with a bar while it is made."""

from __future__ import annotations

import argparse
import logging
import shutil
import sys
from pathlib import Path

from tqdm import tqdm

from driftwell.cli.terminal.printing import answer, is_terminal, tell
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.record.reader import Run, open_run


def movie_command(asked: argparse.Namespace) -> int:
    """Make the movie and say where it is, or why there is none; returns the exit code."""
    from driftwell.report.movie.making import make_movie
    from driftwell.report.movie.options import MovieOptions

    logging.getLogger("matplotlib").setLevel(logging.ERROR)
    try:
        run = open_run(asked.run)
        path = _file(run, asked.output)
        options = MovieOptions(
            asked.seconds, asked.frames_per_second, asked.plane, asked.dots, asked.height
        )
        options.check()
        tqdm.monitor_interval = 0
        with tqdm(
            total=options.frames, unit="frame", leave=False, disable=not is_terminal(sys.stderr)
        ) as bar:
            made = make_movie(run, path, options, lambda done, _: bar.update(done - bar.n) and None)
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    size = made.stat().st_size / 1e6
    return (
        FINISHED
        if answer([f"movie: {made} ({options.frames} frames, {size:.2g} MB)"])
        else UNUSABLE
    )


def _file(run: Run, given: str | None) -> Path:
    """The file to write."""
    if given is not None:
        return Path(given)
    ending = "mp4" if shutil.which("ffmpeg") else "gif"
    return Path(f"{run.folder.resolve().name}.{ending}")
