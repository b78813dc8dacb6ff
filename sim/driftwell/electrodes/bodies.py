"""The bodies that electrodes are: drawings turned about z or drawn along it, shapes in space."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from itertools import pairwise
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.electrodes.shapes.form import Geometry
from driftwell.geometry.outline import Outline, circle, line, outline
from driftwell.geometry.solid import Extruded, Frame, Mesh, Revolved, Solid

ENCLOSURE = "enclosure"
"""What the can around all electrodes is called: one more electrode, the last, at 0 V."""


def names_of(electrodes: Electrodes | None, electrode: Sequence[Electrode]) -> tuple[str, ...]:
    """Names of all electrodes in the order of their bodies."""
    names = tuple(each.name for each in electrode)
    enclosed = electrodes is not None and electrodes.enclosure is not None
    return (*names, ENCLOSURE) if enclosed else names


def bodies_of(
    electrodes: Electrodes | None, electrode: Sequence[Electrode], folder: Path
) -> list[tuple[Solid, ...]]:
    """The bodies of each electrode, then those of the enclosure, as the scenario sees them.

    folder : what files named by shapes count from
    """
    common = electrodes or Electrodes()
    made = own_bodies(common, electrode, folder)
    return [tuple(moved(solid, common.centre) for solid in own) for own in made]


def own_bodies(
    electrodes: Electrodes, electrode: Sequence[Electrode], folder: Path
) -> list[tuple[Solid, ...]]:
    """The same in the electrodes' own coordinates."""
    geometry = electrodes.geometry
    made: list[tuple[Solid, ...]] = []
    for each in electrode:
        solids: list[Solid] = []
        for shape in each.shape:
            if geometry == "spatial":
                solids += shape.solids(folder)
            else:
                solids.append(swept(shape.outline(geometry), geometry))
        made.append(tuple(solids))
    if electrodes.enclosure is not None:
        made.append((enclosure_of(electrodes, thin=True),))
    return made


def swept(drawn: Outline, geometry: Geometry) -> Solid:
    """The body that an outline in (r, z) or (x, y) stands for."""
    return Revolved(drawn) if geometry == "axisymmetric" else Extruded(drawn, np.inf)


def moved(solid: Solid, by: Sequence[float]) -> Solid:
    """A body moved in space, m."""
    step: NDArray[np.float64] = np.asarray(by, dtype=np.float64)
    if isinstance(solid, Mesh):
        return replace(solid, vertices=solid.vertices + step)
    return replace(solid, frame=Frame(solid.frame.origin + step, solid.frame.axes))


def enclosure_of(electrodes: Electrodes, thin: bool) -> Solid:
    """The enclosure as a thin shell, or filled with all it encloses, in own coordinates."""
    can = electrodes.enclosure
    if can is None:
        raise ValueError("there is no enclosure")
    if electrodes.geometry == "spatial":
        return _box(can.size or (0.0, 0.0, 0.0), closed=not thin)
    radius, half = can.radius or 0.0, 0.5 * (can.length or 0.0)
    if electrodes.geometry == "planar":
        drawn = circle((0.0, 0.0), radius)
        return Extruded(Outline(drawn.pieces, drawn.loops, solid=not thin), np.inf)
    corners = [(0.0, -half), (radius, -half), (radius, half), (0.0, half)]
    sides = [line(a, b) for a, b in pairwise(corners)]
    return Revolved(outline([sides], solid=not thin))


def _box(size: tuple[float, float, float], closed: bool) -> Mesh:
    """A box about the origin, as 12 triangles."""
    signs = [(x, y, z) for x in (-0.5, 0.5) for y in (-0.5, 0.5) for z in (-0.5, 0.5)]
    quads = ((0, 1, 3, 2), (4, 6, 7, 5), (0, 4, 5, 1), (2, 3, 7, 6), (0, 2, 6, 4), (1, 5, 7, 3))
    faces = [t for a, b, c, d in quads for t in ((a, b, c), (a, c, d))]
    return Mesh(np.array(signs) * np.array(size), np.array(faces, dtype=np.int64), closed)
