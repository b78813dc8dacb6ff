"""Triangles of a body of revolution: rings of points, more of them where rings are longer."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.patches import Patch
from driftwell.geometry.solid import Revolved
from driftwell.geometry.stations import Chain, Fineness, chains, extent_of

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

_FEWEST = 8
"""Points of a ring, at least; always a multiple of 4, so that mirror planes survive."""
_ON_AXIS = 1e-9
"""Points closer to the axis than this part of the outline's extent are on it."""


def revolved_patches(solid: Revolved, how: Fineness) -> list[Patch]:
    """One patch for each loop of the outline, in own coordinates."""
    near = _ON_AXIS * extent_of(solid.outline)
    return [_patch(chain, near, how) for chain in chains(solid.outline, how)]


def _patch(chain: Chain, near: float, how: Fineness) -> Patch:
    radius, height = chain.points[:, 0], chain.points[:, 1]
    facing = _facing(chain)
    counts = _counts(radius, facing, near, how)
    points, starts = [], np.cumsum([0, *counts])
    for r, z, n, outward in zip(radius, height, counts, facing, strict=True):
        angle = 2.0 * math.pi * np.arange(n) / n
        reach = 0.0 if n == 1 else float(r)
        if how.fair and n > 1:
            inward = (2.0 / 3.0) * (1.0 - math.cos(math.pi / n))
            reach *= 1.0 + outward * inward / (1.0 - inward)
        ring = np.stack([np.cos(angle), np.sin(angle), np.full(n, z)], axis=1)
        ring[:, :2] *= reach
        points.append(ring)
    pairs = [(k, k + 1) for k in range(len(radius) - 1)]
    if chain.closed:
        pairs.append((len(radius) - 1, 0))
    strips = [
        _strip(int(starts[a]), counts[a], int(starts[b]), counts[b], k)
        for k, (a, b) in enumerate(pairs)
    ]
    patch = Patch(np.concatenate(points), np.concatenate(strips))
    return patch if chain.inside_left is False else patch.turned_over()


def _facing(chain: Chain) -> Floats:
    """How much the surface faces the axis or away from it at each station, 0 to 1; rims wholly."""
    points = chain.points
    along = np.diff(points, axis=0)
    if chain.closed:
        along = np.concatenate([along, points[:1] - points[-1:]])
    steep = np.abs(along[:, 1]) / np.linalg.norm(along, axis=1)
    if chain.closed:
        return np.asarray(np.maximum(steep, np.roll(steep, 1)))
    inner = np.maximum(steep[:-1], steep[1:])
    ends = (1.0, 1.0) if chain.inside_left is None else (steep[0], steep[-1])
    return np.concatenate([[ends[0]], inner, [ends[1]]])


def _counts(radius: Floats, facing: Floats, near: float, how: Fineness) -> list[int]:
    """Points of each ring: the largest ring's number, or a half, a quarter, ... of it."""
    around = 2.0 * math.pi * radius
    needed = np.maximum(np.maximum(around / how.size, 2.0 * math.pi / how.turn * facing), _FEWEST)
    largest = float(np.max(needed)) - 1e-9
    most = min(
        base * 2 ** max(0, math.ceil(math.log2(largest / base)))
        for base in (_FEWEST, 12 * _FEWEST // 8)
    )
    found = []
    for r, least in zip(radius, needed, strict=True):
        n = most
        while n % 8 == 0 and n // 2 >= max(least - 1e-9, _FEWEST):
            n //= 2
        found.append(1 if r <= near else n)
    return found


def _strip(a: int, count_a: int, b: int, count_b: int, number: int) -> Ints:
    """Triangles from a ring that begins at point `a` to the next one, which begins at `b`."""
    if count_a == 1 and count_b == 1:
        return np.empty((0, 3), dtype=np.int64)
    if count_a > count_b:
        return _strip(b, count_b, a, count_a, number)[:, ::-1]
    fine = np.arange(count_b)
    here, there = b + fine, b + (fine + 1) % count_b
    if count_a == 1:
        return np.stack([np.full(count_b, a), here, there], axis=1)
    if count_a == count_b:
        own, own_next = a + fine, a + (fine + 1) % count_a
        even = ((fine + number) % 2 == 0)[:, None]
        first = np.where(even, np.stack([own, here, there], 1), np.stack([own, here, own_next], 1))
        second = np.where(
            even, np.stack([own, there, own_next], 1), np.stack([here, there, own_next], 1)
        )
        return np.concatenate([first, second])
    ratio = count_b // count_a
    coarse, place = fine // ratio, fine % ratio
    apex = a + np.where(place < ratio // 2, coarse, (coarse + 1) % count_a)
    fans = np.stack([apex, here, there], axis=1)
    every = np.arange(count_a)
    middle = b + every * ratio + ratio // 2
    gaps = np.stack([a + every, middle, a + (every + 1) % count_a], axis=1)
    return np.concatenate([fans, gaps])
