"""A run as a movie, from its first record to its last, or to where it got."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import DriftwellError
from driftwell.record.reader import Run
from driftwell.report.movie.course import courses_of
from driftwell.report.movie.encoder import encode, form_of
from driftwell.report.movie.options import MovieOptions
from driftwell.report.movie.stage import Stage
from driftwell.report.paper.sheet import style
from driftwell.report.pictures.scene import scene_of
from driftwell.report.sections.scenery import Scenery, scenery_of

Heard = Callable[[int, int], None]


def make_movie(
    run: Run, path: Path, options: MovieOptions | None = None, heard: Heard | None = None
) -> Path:
    """Write the movie of a run; returns its file, which is there whole or not at all.

    heard : is told after each frame how many are done, of how many

    Raises
    ------
    FigureError
        The run recorded no ways of charges, an option has no sense, or there is no encoder.
    RecordError
        The record cannot be read, or the file cannot be written.
    """
    chosen = options or MovieOptions()
    chosen.check()
    form_of(path)
    scene = scene_of(run)
    courses = courses_of(scene, chosen.dots)
    with style():
        stage = Stage(
            courses, scene.clouds, chosen.axes, _scenery(run), run.header.title, chosen.height
        )
        times = np.linspace(float(courses.time[0]), float(courses.time[-1]), chosen.frames)
        encode(path, _told(stage, times, heard), stage.size, chosen.rate, run.header.title)
    return path


def _told(
    stage: Stage, times: NDArray[np.float64], heard: Heard | None
) -> Iterator[NDArray[np.uint8]]:
    for number, time in enumerate(times):
        yield stage.image(float(time))
        if heard is not None:
            heard(number + 1, times.size)


def _scenery(run: Run) -> Scenery | None:
    """What charges move among; None where it cannot be read or made again: a movie does without."""
    try:
        return scenery_of(run, solve=False)[0]
    except DriftwellError:
        return None
