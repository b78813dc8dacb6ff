"""Potentials continued smoothly into conductors, so that a spline does not meet their kink.

Inside a conductor the potential is constant; at its surface the slope jumps. A spline through such
values errs over several cells on the open side. So each node inside takes the value of a polynomial
along the normal through its foot on the surface: its value there is the conductor's own, and
values and slopes are those of the potential at two places outside (Hermite interpolation by
divided differences). The deeper the node, the more slowly the polynomial is followed, and its
share fades down to the conductor's potential :data:`GONE` cells deep, or, of a thinner body, where
another part of the surface comes nearer.

Thin sheets and edges have no such continuation: what faces both sides of a sheet is two potentials,
and an edge's is singular.

References
----------
Divided differences with repeated places: C. de Boor, A Practical Guide to Splines (1978), ch. I
(from memory). Places and fading were chosen by measurement, see docs/numerics/field-maps.md.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.fields.maps.source import Depth, PotentialSource

Floats = NDArray[np.float64]

SAMPLES = (1.0, 3.0)
"""Distances from the surface of the places a continuation is taken from, in cells."""
GONE = 16.0
"""Cells below the surface where nothing is left of the continuation."""
_FOLLOWED = 0.625
_FADING = 0.19
_DEPTHS = (2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0, 10.0, 12.0, 14.0, GONE)


def continue_inside(
    values: Floats,
    nodes: Floats,
    distance: Floats,
    spacing: tuple[float, ...],
    source: PotentialSource,
    depth: Depth,
    is_round: bool,
) -> int:
    """Overwrite the values (e, n) at nodes inside conductors by what lies outside, continued.

    Parameters
    ----------
    values : (e, n) float64, changed
    nodes : (n, d), m
    distance : (n,), of the nodes from the nearest surface, negative inside, m
    spacing : of the grid, m
    source, depth : the potential, and the distance of points from the nearest surface
    is_round : whether the first coordinate is the distance from an axis

    Returns
    -------
    The number of points the source was asked at.
    """
    cells = np.array(spacing)
    here = np.flatnonzero((distance < 0.0) & (distance > -GONE * cells.max()))
    if here.size == 0:
        return 0
    normal = surface_normals(nodes[here], depth, 0.05 * cells, is_round)
    foot = nodes[here] - distance[here, None] * normal
    foot -= depth(in_half(foot, is_round))[:, None] * normal
    cell = np.sqrt(np.sum((normal * cells) ** 2, axis=1))
    inward = np.sum((foot - nodes[here]) * normal, axis=1) / np.where(cell > 0.0, cell, 1.0)
    smooth = _reach_open(foot, normal, cell, depth, is_round)
    here, normal, foot = here[smooth], normal[smooth], foot[smooth]
    cell, inward = cell[smooth], inward[smooth]
    room = _room(foot, normal, cell, depth, is_round)
    within = (inward > 0.0) & (inward < room)
    here, normal, foot = here[within], normal[within], foot[within]
    cell, inward, room = cell[within], inward[within], room[within]
    if here.size == 0:
        return 0
    numbers = [values[:, here]]
    for step in SAMPLES:
        point = foot + (step * cell)[:, None] * normal
        half = in_half(point, is_round)
        potential, field = source.potential(half), source.field(half)
        if is_round:
            field[..., 0] *= np.where(point[:, 0] < 0.0, -1.0, 1.0)
        numbers += [potential, -np.einsum("end,nd->en", field, normal) * cell]
    outside = _hermite(SAMPLES, numbers, -_followed(inward, room))
    values[:, here] += (outside - values[:, here]) * _share(inward, room)
    return int(here.size * len(SAMPLES))


def in_half(points: Floats, is_round: bool) -> Floats:
    """Points on the side of the axis where r is positive."""
    if not is_round:
        return points
    half = points.copy()
    half[:, 0] = np.abs(half[:, 0])
    return half


def surface_normals(points: Floats, depth: Depth, step: Floats, is_round: bool) -> Floats:
    """Unit vectors (n, d) along which the distance from the surface grows; 0 where none do."""
    slopes = np.empty_like(points)
    for axis, h in enumerate(step):
        shift = np.zeros(points.shape[1])
        shift[axis] = h
        ahead, behind = in_half(points + shift, is_round), in_half(points - shift, is_round)
        slopes[:, axis] = (depth(ahead) - depth(behind)) / (2.0 * h)
    length = np.sqrt(np.sum(slopes**2, axis=1))
    return slopes / np.where(length > 0.5, length, np.inf)[:, None]


def _reach_open(
    foot: Floats, normal: Floats, cell: Floats, depth: Depth, is_round: bool
) -> NDArray[np.bool_]:
    """Whether the places outside lie as far from any surface as they were meant to."""
    fine = np.sum(normal**2, axis=1) > 0.5
    for step in SAMPLES:
        point = in_half(foot + (step * cell)[:, None] * normal, is_round)
        fine &= depth(point) > 0.8 * step * cell
    return fine


def _room(foot: Floats, normal: Floats, cell: Floats, depth: Depth, is_round: bool) -> Floats:
    """How deep one can go below each foot before another part of the surface is nearer, cells."""
    room = np.zeros(len(foot))
    going = np.ones(len(foot), dtype=bool)
    for deep in _DEPTHS:
        point = in_half(foot - (deep * cell)[:, None] * normal, is_round)
        going &= np.abs(depth(point) + deep * cell) < 0.02 * deep * cell
        room[going] = deep
    return room


def _followed(inward: Floats, room: Floats) -> Floats:
    """How far the polynomial is followed at a depth, in cells: one to one at first, ever less.

    The integral of a :func:`_share` from the surface on.
    """
    end = _FOLLOWED * room
    t = np.minimum(inward / end, 1.0)
    return np.asarray(end * (t - t**5 * (7.0 - 14.0 * t + 10.0 * t**2 - 2.5 * t**3)))


def _share(inward: Floats, room: Floats) -> Floats:
    """The share of the continuation: from 1 to 0, with three continuous derivatives."""
    t = np.clip((inward / room - _FADING) / (1.0 - _FADING), 0.0, 1.0)
    return np.asarray(1.0 - t**4 * (35.0 - 84.0 * t + 70.0 * t**2 - 20.0 * t**3))


def _hermite(steps: tuple[float, ...], numbers: list[Floats], at: Floats) -> Floats:
    """The polynomial with the value numbers[0] at 0, and value and slope at each step, at (n,)."""
    places = [0.0]
    for step in steps:
        places += [step, step]
    column = [numbers[0]]
    for k in range(len(steps)):
        column += [numbers[1 + 2 * k]] * 2
    slopes = {2 * k + 1: numbers[2 + 2 * k] for k in range(len(steps))}
    leading = [column[0]]
    for order in range(1, len(places)):
        after = []
        for k in range(len(places) - order):
            gap = places[k + order] - places[k]
            after.append(slopes[k] if gap == 0.0 else (column[k + 1] - column[k]) / gap)
        column = after
        leading.append(column[0])
    value = leading[-1]
    for k in range(len(places) - 2, -1, -1):
        value = value * (at - places[k]) + leading[k]
    return value
