"""The pictures of a run: which there are, and how they get into its folder."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from matplotlib.figure import Figure

from driftwell.record.reader import Run
from driftwell.report.paper.gallery import hang
from driftwell.report.paper.sheet import png, style
from driftwell.report.pictures.arrivals import arrivals_picture
from driftwell.report.pictures.cloud import cloud_picture
from driftwell.report.pictures.envelope import envelope_picture
from driftwell.report.pictures.ledger import ledger_picture
from driftwell.report.pictures.losses import losses_picture
from driftwell.report.pictures.phase_space import phase_space_picture
from driftwell.report.pictures.scene import Scene, scene_of
from driftwell.report.pictures.sizes import sizes_picture
from driftwell.report.pictures.spectrum import spectrum_picture
from driftwell.report.pictures.trajectories import trajectories_picture

PICTURES: dict[str, Callable[[Scene], Figure | None]] = {
    "cloud": cloud_picture,
    "sizes": sizes_picture,
    "phase-space": phase_space_picture,
    "envelope": envelope_picture,
    "spectrum": spectrum_picture,
    "trajectories": trajectories_picture,
    "losses": losses_picture,
    "arrivals": arrivals_picture,
    "ledger": ledger_picture,
}
"""Every picture by its name; None says that there is nothing to show."""


def draw(run: Run) -> list[Path]:
    """Draw a run into ``pictures/`` of its folder; returns the files of the pictures made.

    Each file appears whole. A picture with nothing to show is not made, and one left from an
    earlier drawing is taken away.

    Raises RecordError where the record cannot be read or the folder cannot be written.
    """
    with style():
        images = {
            f"{name}.png": png(figure, run.header.title) for name, figure in figures(run).items()
        }
    old = [f"{name}.png" for name in PICTURES]
    return hang(run.folder, images, old, "the record itself is whole")


def figures(run: Run) -> dict[str, Figure]:
    """The pictures of a run that have something to show, by name."""
    scene = scene_of(run)
    with style():
        made = {name: picture(scene) for name, picture in PICTURES.items()}
    return {name: figure for name, figure in made.items() if figure is not None}
