"""Picture: place against slope, or against velocity, along each axis, with the rms ellipse.

A cloud that flies along one axis is shown with slopes, u_x / u_z, across that axis; any other with
proper velocities. The ellipse of a cloud passes through one standard deviation; pi times its rms
emittance is its area.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from matplotlib.axes import Axes
from matplotlib.figure import Figure
from matplotlib.patheffects import withStroke
from numpy.typing import NDArray

from driftwell.answers.evidence import Snapshot
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.report.paper.palette import INK, colour
from driftwell.report.paper.panel import put_across, put_up
from driftwell.report.paper.projection import cloud_key, put_dots, thinning
from driftwell.report.paper.ruler import in_words, interval, ruler
from driftwell.report.paper.sheet import Entry, sheet
from driftwell.report.pictures.scene import Scene

Floats = NDArray[np.float64]

AXES = "xyz"
LEAST = 8
"""Fewer charges do not fill a phase space."""
PARAXIAL = 5.0
"""Mean over spread of the velocity along an axis from which a cloud is said to fly along it."""
MOST_ELLIPSES = 3
"""More clouds than these stay without ellipses."""


@dataclass(frozen=True, slots=True)
class Plane:
    """What is shown along an axis: names and SI unit of the upward values, and these values (n,).

    scale : the emittance is the ellipse's own over this: 1 for slopes, the speed of light for
        velocities
    """

    name: str
    unit: str
    up: Floats
    scale: float


def phase_space_picture(scene: Scene) -> Figure | None:
    """Start and end, one above the other.

    What has too few charges, or all at one velocity, is left out; None where that is both.
    """
    views = [
        (word, view)
        for word, view in scene.views
        if np.unique(view.cloud, return_counts=True)[1].max() >= LEAST
        and np.any(np.ptp(view.velocity, axis=0) > 0.0)
    ]
    if not views:
        return None
    flight = {flight_axis(view) for _, view in views}
    along = flight.pop() if len(flight) == 1 else None
    key = [*cloud_key(scene.clouds), Entry("rms ellipse", INK, line="-")]
    if along is not None:
        across = AXES[along - 2]
        key.append(Entry(f"{across}′: slope u{across} / u{AXES[along]}", INK))
    key.append(Entry("u: proper velocity", INK))
    every = max(thinning(len(view.id)) for _, view in views)
    if every > 1:
        key.append(Entry(f"one charge in {every} drawn", INK))
    figure = sheet(scene.run, 9.6, 0.9 + 3.2 * len(views), key)
    panels = figure.subplots(len(views), 3, squeeze=False)
    for row, (word, view) in enumerate(views):
        notes = [
            put_plane(panels[row, axis], view, axis, plane_of(view, axis, along))
            for axis in range(3)
        ]
        head = f"{word}: t = {in_words(view.time, 's', 4)}, {len(view.id)} charges"
        notes[0] = "\n".join(filter(None, (head, notes[0])))
        for axis, note in enumerate(notes):
            panels[row, axis].set_title(note)
    return figure


def flight_axis(snapshot: Snapshot) -> int | None:
    """The axis all clouds fly along, None where there is none."""
    found = set()
    for cloud in np.unique(snapshot.cloud):
        velocity = snapshot.velocity[snapshot.cloud == cloud]
        mean, spread = velocity.mean(axis=0), velocity.std(axis=0)
        axis = int(np.abs(mean).argmax())
        sure = abs(mean[axis]) > PARAXIAL * max(
            float(spread.max()), *(abs(float(mean[other])) for other in range(3) if other != axis)
        )
        one_way = velocity[:, axis].min() * velocity[:, axis].max() > 0.0
        found.add(axis if sure and one_way else None)
    return found.pop() if len(found) == 1 else None


def plane_of(snapshot: Snapshot, axis: int, along: int | None) -> Plane:
    """What is shown along an axis, for charges that fly along `along`."""
    if along is None or axis == along:
        return Plane(f"u{AXES[axis]}", "m/s", snapshot.velocity[:, axis], SPEED_OF_LIGHT)
    slope = snapshot.velocity[:, axis] / snapshot.velocity[:, along]
    return Plane(f"{AXES[axis]}′", "rad", slope, 1.0)


def put_plane(axes: Axes, snapshot: Snapshot, axis: int, plane: Plane) -> str:
    """Fill a panel; returns the emittance of a cloud that is alone, in words."""
    place = snapshot.position[:, axis]
    reach = float(np.ptp(snapshot.position, axis=0).max())
    across = ruler(interval(place, least=reach), "m")
    up = ruler(
        interval(
            plane.up,
            least=float(np.ptp(snapshot.velocity, axis=0).max()) if plane.unit == "m/s" else 0.0,
        ),
        plane.unit,
    )
    put_dots(axes, snapshot, across.shown(place), up.shown(plane.up), 0.8)
    put_across(axes, across, AXES[axis], 6)
    put_up(axes, up, plane.name)
    clouds = np.unique(snapshot.cloud)
    note = ""
    for cloud in clouds if len(clouds) <= MOST_ELLIPSES else ():
        own = snapshot.cloud == cloud
        outline = rms_ellipse(across.shown(place[own]), up.shown(plane.up[own]))
        if outline is None:
            continue
        line, area = outline
        axes.plot(
            *line,
            color=INK if len(clouds) == 1 else colour(int(cloud)),
            linewidth=1.4,
            path_effects=[withStroke(linewidth=3.4, foreground="white")],
        )
        if len(clouds) == 1:
            kind = "rms emittance" if plane.scale == 1.0 else "norm. rms emittance"
            value = area * across.size * up.size / plane.scale
            note = f"{kind} {in_words(value, 'm rad')}"
    return note


def rms_ellipse(across: Floats, up: Floats) -> tuple[Floats, float] | None:
    """Points (2, m) of the rms ellipse, and the product of its semi-axes.

    None where the charges are too few, or lie on a line.
    """
    if across.size < LEAST:
        return None
    centre = np.array([across.mean(), up.mean()])
    apart = np.stack([across, up]) - centre[:, None]
    scale = np.sqrt(np.mean(apart**2, axis=1))
    if not np.all(scale > 0.0):
        return None
    turn, lengths, _ = np.linalg.svd(apart / scale[:, None], full_matrices=False)
    axes = lengths / math.sqrt(across.size)
    angle = np.linspace(0.0, 2.0 * math.pi, 181)
    circle = axes[:, None] * np.stack([np.cos(angle), np.sin(angle)])
    return centre[:, None] + scale[:, None] * (turn @ circle), float(np.prod(axes) * np.prod(scale))
