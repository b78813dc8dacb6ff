"""Whether conductors about the charges would have pulled on them: images that were left out.

Estimated at every look as the run does at its start (images/importance.py), and besides from tubes
and balls that absorb, which in a machine are mostly of metal. What images move is taken from one
look to the next; at the start, in the whole run. What the run has said at its start is marked.
"""

from __future__ import annotations

import math
from collections.abc import Iterator
from functools import partial
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.errors import DriftwellError
from driftwell.forms import spelled
from driftwell.geometry.distance import distances
from driftwell.images.importance import SHARE, Distance, Importance, importance
from driftwell.judgement.finding import Finding, about
from driftwell.judgement.subject import Subject
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.model import Scenario
from driftwell.walls.cylinder import Cylinder
from driftwell.walls.sphere import Sphere

Floats = NDArray[np.float64]

LATER = 0.05
"""The share from which images are spoken of that were not looked at when the run began: where
walls lie all about, the estimate is too high by a few times."""


def images_left_out(subject: Subject) -> Iterator[Finding]:
    """The cloud and the time at which images would have mattered most."""
    scenario = subject.scenario
    if scenario is None or scenario.images is not None or not subject.summed:
        return
    for what, distance, seen in _conductors(scenario):
        at_start, worst, when = False, None, 0.0
        for k, look in enumerate(subject.looks):
            span = look.time - subject.looks[k - 1].time if k else subject.run.header.duration
            for cloud in subject.run.header.clouds:
                own = subject.named(look, cloud)
                if len(own) == 0 or cloud.charge == 0.0:
                    continue
                found = importance(
                    cloud.name,
                    own.position,
                    own.charge * own.weight,
                    own.mass * own.weight,
                    distance,
                    span,
                )
                limit = SHARE if on_start(look.time, cloud, seen) else LATER
                if not (found.matters(limit) and math.isfinite(found.share)):
                    continue
                at_start |= limit == SHARE
                if worst is None or found.share > worst.share:
                    worst, when = found, look.time
        if worst is not None:
            yield _told(what, worst, when, at_start)
            return


def on_start(time: float, cloud: CloudFacts, seen: bool) -> bool:
    """Whether the run itself has looked at this when it began."""
    return seen and time == 0.0 and not cloud.emitted


def _told(what: str, worst: Importance, when: float, told: bool) -> Finding:
    share, limit = worst.share, SHARE if told else LATER
    return Finding(
        "images left out",
        f"at t = {spelled(when, 's', 3)} {what}, {about(worst.distance, 'm')} from "
        f'"{worst.name}", would pull it with {about(worst.image, "V/m")}, about {share:.2g} '
        f"of its own push at its edge; up to {limit:g} may be left out",
        share,
        limit,
        "Give the scenario [images] (docs/numerics/images.md).",
        told=told,
    )


def _conductors(scenario: Scenario) -> Iterator[tuple[str, Distance, bool]]:
    """What may answer to charges, its distance, and whether the run has looked at it."""
    if scenario.electrode:
        try:
            table = Conductors.of(scenario, Path()).table
        except DriftwellError:
            table = None  # a file of a shape is not here
        if table is not None:
            yield "the electrodes", partial(_from_electrodes, table), True
    for wall in scenario.wall:
        if wall.effect == "absorb" and isinstance(wall, Cylinder | Sphere) and wall.closed():
            yield f'"{wall.name}", if it is of metal', partial(_from_round, wall), False


def _from_electrodes(table: object, points: Floats) -> Floats:
    return distances(table, points)[0]  # type: ignore[arg-type]


def _from_round(wall: Cylinder | Sphere, points: Floats) -> Floats:
    """Distances of points (n, 3) within a tube or a ball from it, m."""
    apart = points - np.array(wall.centre)
    if isinstance(wall, Cylinder):
        apart[:, "xyz".index(wall.axis)] = 0.0
    return np.asarray(wall.radius - np.linalg.norm(apart, axis=1))
