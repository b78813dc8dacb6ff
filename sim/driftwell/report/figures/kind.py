"""What every kind of figure declares."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from matplotlib.figure import Figure

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.report.figures.options import FigureError, FigureOptions, known, snapshot_time
from driftwell.report.pictures.scene import Scene


@dataclass(frozen=True, slots=True)
class Kind:
    """One kind of figure.

    words : what it shows, in a line
    takes : names of the options that mean something to it, beside those of all figures
    missing : why a run cannot give it, a phrase; empty where it can
    draw : the figure; raises FigureError where the options ask for what is not there
    """

    words: str
    takes: tuple[str, ...]
    missing: Callable[[Scene], str]
    draw: Callable[[Scene, FigureOptions], Figure]


def chosen_clouds(scene: Scene, options: FigureOptions) -> list[CloudFacts]:
    """The clouds asked for, all where none was named."""
    names = [known(name, scene.run.clouds, "cloud") for name in options.of]
    return [cloud for cloud in scene.clouds if not names or cloud.name in names]


def chosen_snapshot(scene: Scene, options: FigureOptions) -> tuple[Snapshot, list[CloudFacts]]:
    """The charges of the clouds asked for at the time asked for, and these clouds."""
    clouds = chosen_clouds(scene, options)
    found = scene.run.snapshot(snapshot_time(scene.run, options.at))
    kept = of_clouds(found, clouds)
    if not len(kept.id):
        raise FigureError(
            f"{scene.run.folder}: no charge of what was asked for is left at "
            f"t = {found.time:.6g} s. Take an earlier time with --at, or another cloud."
        )
    return kept, clouds


def of_clouds(snapshot: Snapshot, clouds: Sequence[CloudFacts]) -> Snapshot:
    """The charges of some clouds whose place and velocity are numbers."""
    kept = np.isin(snapshot.cloud, [cloud.index for cloud in clouds])
    kept &= np.isfinite(snapshot.position).all(axis=1) & np.isfinite(snapshot.velocity).all(axis=1)
    return Snapshot(
        snapshot.time,
        snapshot.id[kept],
        snapshot.cloud[kept],
        snapshot.position[kept],
        snapshot.velocity[kept],
        snapshot.charge[kept],
        snapshot.mass[kept],
        snapshot.weight[kept],
    )


def no_snapshot(scene: Scene) -> str:
    """Why a figure of a snapshot cannot be drawn."""
    return "" if scene.run.snapshots else "the run kept no snapshot"
