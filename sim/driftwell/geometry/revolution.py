"""Outlines in (r, z) that are to be turned about the axis r = 0: their places on it."""

from __future__ import annotations

import math
from collections.abc import Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.outline import Outline, outline
from driftwell.geometry.strokes import strokes

Floats = NDArray[np.float64]
_NEAR = 1e-12
"""Distance from the axis, of the outline's size, that counts as none."""


def least_r(drawn: Outline) -> float:
    """The least r of an outline, m."""
    found = strokes(drawn)
    least = min(found.start.real.min(), found.end.real.min())
    bent = found.curvature != 0.0
    if bent.any():
        arcs = found.taken(bent)
        centre = arcs.start + 1j * np.exp(1j * arcs.direction) / arcs.curvature
        leftmost = centre - 1.0 / np.abs(arcs.curvature)
        distance = np.diagonal(arcs.nearest(leftmost)[0])
        on_arc = distance <= _NEAR * np.abs(leftmost)
        if on_arc.any():
            least = min(least, leftmost.real[on_arc].min())
    return float(least)


def without_axis(loops: Sequence[Sequence[Floats]], solid: bool) -> Outline:
    """The outline of loops of pieces (7,), those along the axis left out.

    What bounds an area begins and ends on the axis then, in one loop for each part between two
    pieces that were left out.
    """
    size = max(float(np.abs(piece[:4]).max()) for loop in loops for piece in loop)
    kept: list[list[Floats]] = []
    for loop in loops:
        on_axis = [
            bool(piece[6] == 0.0 and max(abs(piece[0]), abs(piece[2])) <= _NEAR * size)
            for piece in loop
        ]
        if not any(on_axis):
            kept.append(list(loop))
            continue
        first = on_axis.index(True)
        part: list[Floats] = []
        for k in range(1, len(loop) + 1):
            at = (first + k) % len(loop)
            if not on_axis[at]:
                part.append(loop[at])
            elif part:
                kept.append(part)
                part = []
    return outline(kept, solid)


def half_circle(height: float, radius: float) -> list[Floats]:
    """The half circle about (0, height) from the lower to the upper end of its axis."""
    return [np.array([0.0, height - radius, 0.0, height + radius, 0.0, height, math.pi])]
