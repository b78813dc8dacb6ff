"""Points on the surfaces of bodies, and stretches of outlines to be looked at ever more closely."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.body_table import body_table
from driftwell.geometry.distance import plane_distances
from driftwell.geometry.outline import Outline
from driftwell.geometry.solid import Extruded, Mesh, Revolved, Solid

Floats = NDArray[np.float64]

_PARTS = 16
_TURNS = 24
_HEIGHTS = 9
_GRID = 24


@dataclass(frozen=True, slots=True)
class Stretches:
    """Parts of an outline's pieces: piece (k, 7), and from where to where (k,), of 0 to 1."""

    piece: Floats
    low: Floats
    high: Floats

    def middles(self) -> Floats:
        """Their middles, (k, 2), m."""
        return _on(self.piece, 0.5 * (self.low + self.high))

    def halves(self) -> Floats:
        """Half their lengths, (k,), m: no point of one is farther from its middle."""
        p = self.piece
        radius = np.hypot(p[:, 0] - p[:, 4], p[:, 1] - p[:, 5])
        straight = np.hypot(p[:, 2] - p[:, 0], p[:, 3] - p[:, 1])
        whole = np.where(p[:, 6] == 0.0, straight, radius * np.abs(p[:, 6]))
        return np.asarray(0.5 * whole * (self.high - self.low))

    def halved(self, chosen: NDArray[np.bool_]) -> Stretches:
        """The chosen ones, each cut into two."""
        piece, low, high = self.piece[chosen], self.low[chosen], self.high[chosen]
        middle = 0.5 * (low + high)
        return Stretches(
            np.concatenate([piece, piece]),
            np.concatenate([low, middle]),
            np.concatenate([middle, high]),
        )


def stretches(outline: Outline) -> Stretches:
    """All pieces of an outline as one stretch each."""
    n = len(outline.pieces)
    return Stretches(outline.pieces, np.zeros(n), np.ones(n))


def outline_points(outline: Outline, parts: int = _PARTS) -> Floats:
    """Points on an outline, (n, 2): the ends of all pieces, and places between them."""
    part = np.tile(np.linspace(0.0, 1.0, parts + 1), len(outline.pieces))
    return _on(np.repeat(outline.pieces, parts + 1, axis=0), part)


def surface_points(solid: Solid) -> Floats:
    """Points all over the surface of a body, (n, 3), m; of an endless one those at z = 0."""
    if isinstance(solid, Mesh):
        corner = solid.vertices[solid.triangles]
        between = 0.5 * (corner + np.roll(corner, 1, axis=1))
        inner = corner.mean(axis=1, keepdims=True)
        return np.concatenate([corner, between, inner], axis=1).reshape(-1, 3)
    drawn = outline_points(solid.outline)
    if isinstance(solid, Revolved):
        angle = 2.0 * np.pi * np.arange(_TURNS) / _TURNS
        r, z = drawn[:, 0, None], np.repeat(drawn[:, 1], _TURNS)
        places = [(r * np.cos(angle)).ravel(), (r * np.sin(angle)).ravel(), z]
        return solid.frame.outward(np.stack(places, axis=1))
    if np.isinf(solid.half_length):
        return solid.frame.outward(_at(drawn, 0.0))
    heights = np.linspace(-solid.half_length, solid.half_length, _HEIGHTS)
    sides = [_at(drawn, height) for height in heights]
    if solid.outline.solid:
        caps = _inner_points(solid.outline)
        sides += [_at(caps, -solid.half_length), _at(caps, solid.half_length)]
    return solid.frame.outward(np.concatenate(sides))


def _on(piece: Floats, part: Floats) -> Floats:
    """Points (k, 2) at parts (k,) of pieces (k, 7)."""
    start, end, centre = piece[:, 0:2], piece[:, 2:4], piece[:, 4:6]
    angle = part * piece[:, 6]
    x, y = (start - centre).T
    c, s = np.cos(angle), np.sin(angle)
    turned = centre + np.stack([c * x - s * y, s * x + c * y], axis=1)
    straight = start + part[:, None] * (end - start)
    return np.where(piece[:, 6:7] == 0.0, straight, turned)


def _at(drawn: Floats, height: float) -> Floats:
    return np.column_stack([drawn, np.full(len(drawn), height)])


def _inner_points(outline: Outline) -> Floats:
    """Points of a grid within an outline, (n, 2)."""
    around = outline_points(outline)
    axes = [np.linspace(a, b, _GRID) for a, b in zip(around.min(0), around.max(0), strict=True)]
    grid = np.stack(np.meshgrid(*axes), axis=-1).reshape(-1, 2)
    table = body_table([[Extruded(outline, np.inf)]])
    return np.asarray(grid[plane_distances(table, grid, axisymmetric=False)[0] < 0.0])
