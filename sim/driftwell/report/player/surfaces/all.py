"""All surfaces of a scenario, those that can be drawn, and why the others are not."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.bodies import ENCLOSURE, bodies_of
from driftwell.errors import DriftwellError
from driftwell.geometry.solid import Extruded, Mesh, Solid
from driftwell.geometry.surface_points import surface_points
from driftwell.report.player.surfaces.bodies import body_mesh
from driftwell.report.player.surfaces.mesh import Drawable, drawable
from driftwell.report.player.surfaces.walls import finite_corners, wall_mesh
from driftwell.scenario.model import Scenario

Floats = NDArray[np.float64]

MOST = 9000
"""Triangles of all surfaces together, about."""


@dataclass(frozen=True, slots=True)
class Surfaces:
    """What surrounds the charges.

    drawn : the surfaces
    missing : (name, why) of what is not drawn; untrusted
    spine : a point (3,), m, and an axis (0, 1, 2, or -1 for none): what lies on the viewer's side
        of this line, or point, is drawn so that one sees through it
    """

    drawn: tuple[Drawable, ...]
    missing: tuple[tuple[str, str], ...]
    spine: tuple[Floats, int]


def surfaces_of(
    scenario: Scenario, folder: Path, low: Floats, high: Floats, middle: Floats
) -> Surfaces:
    """Surfaces of a scenario; files that shapes name count from `folder`.

    low, high : (3,) m, corners of where the charges go; middle : (3,) m, where most of them are
    """
    bodies, missing = _bodies(scenario, folder)
    walls = [(wall.name, "wall", wall) for wall in scenario.wall]
    walls += [(each.name, "detector", each) for each in scenario.detector]  # type: ignore[misc]
    corners = [low[None], high[None]]
    corners += [_corners(solid) for _, solid in bodies]
    corners += [finite_corners(wall) for _, _, wall in walls]
    held = np.concatenate(corners)
    first, last = held.min(axis=0), held.max(axis=0)
    drawn = []
    each = max(200, MOST // max(1, len(bodies) + len(walls)))
    along = max(1.1 * float(np.abs([low[2], high[2]]).max()), 0.6 * float(np.ptp(held[:, :2])))
    for name, solid in bodies:
        try:
            drawn.append(drawable(name, "electrode", body_mesh(solid, along, min(each, 3000))))
        except (DriftwellError, ValueError, ArithmeticError) as fault:
            missing.append((name, f"its surface cannot be cut into triangles ({fault})"))
    drawn += [drawable(name, kind, wall_mesh(wall, first, last)) for name, kind, wall in walls]
    return Surfaces(tuple(drawn), tuple(missing), _spine(scenario, low, high, middle))


def _bodies(
    scenario: Scenario, folder: Path
) -> tuple[list[tuple[str, Solid]], list[tuple[str, str]]]:
    """The bodies of all electrodes that can be made, by name."""
    common = scenario.electrodes
    alone = None if common is None else common.model_copy(update={"enclosure": None})
    found: list[tuple[str, Solid]] = []
    missing: list[tuple[str, str]] = []
    for each in scenario.electrode:
        try:
            found += [(each.name, solid) for solid in bodies_of(alone, [each], folder)[0]]
        except (DriftwellError, OSError, ValueError, ArithmeticError, ImportError):
            files = [name for shape in each.shape for name in shape.files_named()]
            why = "its file is missing: " + ", ".join(files) if files else "its shape is faulty"
            missing.append((each.name, why))
    if common is not None and common.enclosure is not None and scenario.electrode:
        found += [(ENCLOSURE, solid) for solid in bodies_of(common, [], folder)[-1]]
    return found, missing


def _corners(solid: Solid) -> Floats:
    """Points that hold a body; of an endless one those at its middle."""
    if isinstance(solid, Mesh):
        return solid.vertices
    points = surface_points(solid)
    if isinstance(solid, Extruded) and np.isinf(solid.half_length):
        points = points.copy()
    return points


def _spine(
    scenario: Scenario, low: Floats, high: Floats, middle: Floats
) -> tuple[Floats, int]:
    common = scenario.electrodes
    if scenario.electrode and (common is None or common.geometry == "axisymmetric"):
        return np.array((0.0, 0.0, 0.0) if common is None else common.centre), 2
    if scenario.electrode and common is not None and common.geometry == "planar":
        return middle, 2
    spans = high - low
    longest = int(np.argmax(spans))
    others = np.delete(spans, longest)
    if spans[longest] > 2.0 * float(others.max()):
        return middle, longest
    axes: Sequence[int] = [
        "xyz".index(wall.axis) for wall in scenario.wall if hasattr(wall, "axis")
    ]
    return middle, axes[0] if axes else -1
