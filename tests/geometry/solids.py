"""Bodies that several tests are about."""

from __future__ import annotations

import math

import numpy as np

from driftwell.geometry.outline import Outline, arc, circle, line, outline, rectangle
from driftwell.geometry.solid import Extruded, Frame, Mesh, Revolved, Solid


def turned(a: float, b: float, c: float) -> np.ndarray:
    """A rotation by three angles about z, y and x."""
    ca, sa, cb, sb, cc, sc = (f(t) for t in (a, b, c) for f in (math.cos, math.sin))
    return (
        np.array([[1, 0, 0], [0, cc, sc], [0, -sc, cc]])
        @ np.array([[cb, 0, -sb], [0, 1, 0], [sb, 0, cb]])
        @ np.array([[ca, sa, 0], [-sa, ca, 0], [0, 0, 1]])
    )


FRAME = Frame(np.array([0.3, -0.2, 0.5]), turned(0.4, -1.1, 2.0))


def ball(radius: float, frame: Frame | None = None) -> Revolved:
    """A full sphere: a half circle from axis to axis."""
    half = arc((0.0, -radius), (0.0, radius), (0.0, 0.0), math.pi)
    return Revolved(outline([[half]], solid=True), frame or Frame())


def cone(radius: float, height: float) -> Revolved:
    """A full cone with its tip at the origin, opening along +z."""
    side = line((0.0, 0.0), (radius, height))
    return Revolved(outline([[side, line((radius, height), (0.0, height))]], solid=True))


def brick(half: tuple[float, float, float], frame: Frame | None = None) -> Extruded:
    """A box with these half lengths."""
    drawn = rectangle((-half[0], -half[1]), (half[0], half[1]))
    return Extruded(drawn, half[2], frame or Frame())


def rounded(half: tuple[float, float], radius: float) -> Outline:
    """A rectangle of these half lengths, all within `radius` of it: a stadium-like outline."""
    a, b, r, q = half[0], half[1], radius, 0.5 * math.pi
    return outline(
        [
            [
                line((-a, -b - r), (a, -b - r)),
                arc((a, -b - r), (a + r, -b), (a, -b), q),
                line((a + r, -b), (a + r, b)),
                arc((a + r, b), (a, b + r), (a, b), q),
                line((a, b + r), (-a, b + r)),
                arc((-a, b + r), (-a - r, b), (-a, b), q),
                line((-a - r, b), (-a - r, -b)),
                arc((-a - r, -b), (-a, -b - r), (-a, -b), q),
            ]
        ],
        solid=True,
    )


def mesh_brick(half: tuple[float, float, float], frame: Frame, closed: bool = True) -> Mesh:
    """The same box as 12 triangles, seen from outside counter-clockwise."""
    corners = np.array(
        [[x, y, z] for x in (-1, 1) for y in (-1, 1) for z in (-1, 1)], dtype=np.float64
    ) * np.array(half)
    quads = [(0, 1, 3, 2), (4, 6, 7, 5), (0, 4, 5, 1), (2, 3, 7, 6), (0, 2, 6, 4), (1, 5, 7, 3)]
    faces = [t for a, b, c, d in quads for t in ((a, b, c), (a, c, d))]
    return Mesh(frame.outward(corners), np.array(faces, dtype=np.int64), closed)


def star_mesh(rng: np.random.Generator, rings: int, sides: int) -> Mesh:
    """A closed, bumpy, not convex body about the origin."""
    theta = np.linspace(0.0, math.pi, rings + 2)[1:-1]
    phi = 2.0 * math.pi * np.arange(sides) / sides
    radius = rng.uniform(0.4, 1.2, (rings, sides))
    places = np.stack(
        [
            radius * np.sin(theta)[:, None] * np.cos(phi),
            radius * np.sin(theta)[:, None] * np.sin(phi),
            radius * np.cos(theta)[:, None] * np.ones(sides),
        ],
        axis=2,
    ).reshape(-1, 3)
    vertices = np.concatenate([places, [[0.0, 0.0, 0.9], [0.0, 0.0, -0.9]]])
    top, bottom = len(places), len(places) + 1
    faces = []
    for j in range(sides):
        k = (j + 1) % sides
        faces.append((top, j, k))
        last = (rings - 1) * sides
        faces.append((bottom, last + k, last + j))
        for i in range(rings - 1):
            a, b = i * sides + j, i * sides + k
            c, d = a + sides, b + sides
            faces += [(a, c, b), (b, c, d)]
    return Mesh(vertices, np.array(faces, dtype=np.int64), closed=True)


SOLIDS: dict[str, Solid] = {
    "ball": ball(0.7, FRAME),
    "cone": cone(0.6, 0.9),
    "torus": Revolved(circle((0.8, 0.1), 0.25), FRAME),
    "tube": Revolved(rectangle((0.5, -0.6), (0.7, 0.6))),
    "brick": brick((0.5, 0.3, 0.8), FRAME),
    "rod": Extruded(rounded((0.4, 0.2), 0.1), np.inf, FRAME),
    "plate with a hole": Extruded(
        rectangle((-1.0, -1.0), (1.0, 1.0)).joined(circle((0.2, 0.1), 0.4)), 0.05
    ),
    "sheet": Extruded(circle((0.0, 0.0), 0.8), 0.0, FRAME),
    "bent strip": Extruded(
        outline([[line((-0.7, 0.0), (0.0, 0.4)), line((0.0, 0.4), (0.6, 0.1))]], solid=False), 0.5
    ),
    "thin dome": Revolved(
        outline([[arc((0.6, 0.0), (0.0, 0.6), (0.0, 0.0), 0.5 * math.pi)]], solid=False)
    ),
    "mesh": star_mesh(np.random.default_rng(3), 7, 11),
    "open mesh": mesh_brick((0.5, 0.3, 0.8), FRAME, closed=False),
}
"""One of each kind, all within 2 m of the origin."""
