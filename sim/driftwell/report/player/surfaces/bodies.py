"""Meshes of electrodes: as coarse as the eye allows, endless bodies cut off beyond the charges."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.outline import Outline, line, outline
from driftwell.geometry.solid import Extruded, Mesh, Solid
from driftwell.geometry.stations import extent_of, places
from driftwell.report.player.surfaces.mesh import fewer

Floats = NDArray[np.float64]

TURNS = (math.pi / 18.0, math.pi / 12.0, math.pi / 8.0, math.pi / 6.0)
"""Turns between neighbouring facets that are tried, from fine to coarse."""
MOST_OF_ONE = 3000
"""Triangles of one body."""
FLAT = 2e-3
"""Part of an outline's extent by which what is drawn may miss it."""


def body_mesh(solid: Solid, half_length: float, most: int = MOST_OF_ONE) -> Mesh:
    """Triangles of a body, at most `most`; half_length : m, of what has no end along its axis."""
    if isinstance(solid, Mesh):
        return fewer(solid, most)
    if isinstance(solid, Extruded) and math.isinf(solid.half_length):
        solid = replace(solid, half_length=half_length)
    drawn = replace(solid, outline=angular(solid.outline))
    mesh = Mesh(np.zeros((0, 3)), np.zeros((0, 3), np.int64), False)
    for turn in TURNS:
        mesh = mesh_of(drawn, _ENDLESS, turn, 1.0)
        if len(mesh.triangles) <= most:
            return mesh
    return fewer(mesh, most)


_ENDLESS = 1e6
"""m, longer than any edge: only turns decide how finely a body is cut."""


def angular(drawn: Outline) -> Outline:
    """The outline as straight lines, as few as keep its shape."""
    near = FLAT * extent_of(drawn)
    loops = []
    for low, high in zip(drawn.loops[:-1], drawn.loops[1:], strict=True):
        points = [drawn.pieces[low, 0:2]]
        for piece in drawn.pieces[low:high]:
            parts = max(1, math.ceil(abs(float(piece[6])) / (math.pi / 18.0)))
            points.extend(places(piece, np.linspace(0.0, 1.0, parts + 1))[1:])
        kept = _thinned(np.array(points), near)
        loops.append([line(tuple(a), tuple(b)) for a, b in zip(kept[:-1], kept[1:], strict=True)])
    return outline(loops, drawn.solid)


def _thinned(points: Floats, near: float) -> Floats:
    """The points of a line that it needs (U. Ramer, 1972; D. Douglas, T. Peucker, 1973).

    Of a closed line the point farthest from its beginning is kept too.
    """
    count = len(points)
    keep = np.zeros(count, np.bool_)
    keep[[0, -1]] = True
    spans = [(0, count - 1)]
    if count > 3 and np.linalg.norm(points[0] - points[-1]) <= near:
        far = int(np.argmax(np.linalg.norm(points - points[0], axis=1)))
        keep[far] = True
        spans = [(0, far), (far, count - 1)]
    while spans:
        low, high = spans.pop()
        if high - low < 2:
            continue
        start, along = points[low], points[high] - points[low]
        away = points[low + 1 : high] - start
        square = float(along @ along)
        part = np.clip(away @ along / square, 0.0, 1.0) if square > 0.0 else np.zeros(len(away))
        distance = np.linalg.norm(away - part[:, None] * along, axis=1)
        farthest = int(np.argmax(distance))
        if distance[farthest] > near:
            middle = low + 1 + farthest
            keep[middle] = True
            spans += [(low, middle), (middle, high)]
    return np.asarray(points[keep])
