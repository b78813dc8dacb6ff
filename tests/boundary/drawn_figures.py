"""Figures that several tests draw."""

from __future__ import annotations

import itertools
import math

from driftwell.geometry.outline import Outline, Point2, arc, circle, line, outline


def path(*points: Point2, solid: bool = True) -> Outline:
    """Straight lines from point to point, left open."""
    return outline([[line(a, b) for a, b in itertools.pairwise(points)]], solid)


def sheet(drawn: Outline) -> Outline:
    """The same outline as a thin sheet."""
    return Outline(drawn.pieces, drawn.loops, solid=False)


def ball(height: float, radius: float) -> Outline:
    """A ball about (0, height), in (r, z)."""
    ends = (0.0, height - radius), (0.0, height + radius)
    return outline([[arc(*ends, (0.0, height), math.pi)]], solid=True)


def disc(height: float, radius: float) -> Outline:
    """A thin disc, in (r, z)."""
    return path((0.0, height), (radius, height), solid=False)


def four_rods(rod: float) -> list[tuple[Outline, ...]]:
    """Two pairs of round rods of this radius that touch the circle of radius 1."""
    at = 1.0 + rod
    return [
        (circle((at, 0.0), rod), circle((-at, 0.0), rod)),
        (circle((0.0, at), rod), circle((0.0, -at), rod)),
    ]
