"""Strokes: lines and arcs of an outline by start, direction, curvature and length.

A straight line is an arc of curvature zero, so that whoever walks along an outline, cuts it or asks
for the nearest place on it has one case.

    z(s) = z0 + s sinc(k s / 2) exp(i (a + k s / 2))                                        (1)

with sinc x = sin x / x: the chord of the arc of curvature k that leaves z0 in the direction a.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.geometry.outline import Outline

Floats = NDArray[np.float64]
Complex = NDArray[np.complex128]
_LONGEST_TURN = 0.5 * math.pi * (1.0 + 1e-9)


@dataclass(frozen=True, slots=True)
class Strokes:
    """n strokes, in the plane of complex numbers x + i y.

    start : (n,) complex128, m
    direction : (n,) float64, rad, in which they leave their start
    curvature : (n,) float64, 1/m, positive where they turn to the left
    length : (n,) float64, m
    """

    start: Complex
    direction: Floats
    curvature: Floats
    length: Floats

    def __len__(self) -> int:
        return len(self.start)

    def at(self, s: Floats, which: NDArray[np.int64] | slice = slice(None)) -> Complex:
        """Points at the positions s, m, of the strokes `which`: equation (1)."""
        half = 0.5 * self.curvature[which] * s
        turned = np.exp(1j * (self.direction[which] + half))
        return np.asarray(self.start[which] + s * np.sinc(half / math.pi) * turned)

    @property
    def end(self) -> Complex:
        """(n,) complex128, where they end."""
        return self.at(self.length)

    @property
    def last_direction(self) -> Floats:
        """(n,) float64, rad, in which they arrive at their end."""
        return self.direction + self.curvature * self.length

    def part(self, which: int, begin: float, end: float) -> Strokes:
        """The stroke from `begin` to `end` along stroke `which`."""
        return Strokes(
            self.at(np.array([begin]), np.array([which])),
            np.array([self.direction[which] + self.curvature[which] * begin]),
            self.curvature[which : which + 1],
            np.array([end - begin]),
        )

    def taken(self, which: NDArray[np.generic]) -> Strokes:
        """Some of the strokes, by index or mask."""
        return Strokes(
            self.start[which], self.direction[which], self.curvature[which], self.length[which]
        )

    def reversed(self) -> Strokes:
        """The same strokes walked the other way, each where it was in the list."""
        return Strokes(self.end, self.last_direction + math.pi, -self.curvature, self.length.copy())

    def nearest(self, points: Complex) -> tuple[Floats, Floats]:
        """Distance (m, n) of each point from each stroke, and the position (m, n) that near."""
        away = (points[:, None] - self.start) * np.exp(-1j * self.direction)
        bent = self.curvature != 0.0
        k = np.where(bent, self.curvature, 1.0)
        # about the centre, the angle from the middle of the arc lies within half a turn
        half = 0.5 * k * self.length
        angle = np.angle((1.0 + 1j * k * away) * np.exp(-1j * half)) + half
        s = np.where(bent, angle / k, away.real)
        s = np.clip(s, 0.0, self.length)
        distance = np.abs(self.at(s) - points[:, None])
        return distance, s


def joined(parts: list[Strokes]) -> Strokes:
    """All strokes of a list of strokes."""
    return Strokes(
        np.concatenate([part.start for part in parts]),
        np.concatenate([part.direction for part in parts]),
        np.concatenate([part.curvature for part in parts]),
        np.concatenate([part.length for part in parts]),
    )


def strokes(outline: Outline) -> Strokes:
    """The pieces of an outline in order, arcs cut so that none turns more than a right angle."""
    starts, directions, curvatures, lengths = [], [], [], []
    for x0, y0, x1, y1, xc, yc, sweep in outline.pieces.tolist():
        z0, z1, centre = complex(x0, y0), complex(x1, y1), complex(xc, yc)
        if sweep == 0.0:
            starts.append(z0)
            directions.append(math.atan2(y1 - y0, x1 - x0))
            curvatures.append(0.0)
            lengths.append(abs(z1 - z0))
            continue
        radius, sign = abs(z0 - centre), math.copysign(1.0, sweep)
        count = max(1, math.ceil(abs(sweep) / _LONGEST_TURN))
        tangent = math.atan2((z0 - centre).imag, (z0 - centre).real) + sign * 0.5 * math.pi
        for k in range(count):
            turned = sweep * k / count
            starts.append(centre + (z0 - centre) * complex(math.cos(turned), math.sin(turned)))
            directions.append(tangent + turned)
            curvatures.append(sign / radius)
            lengths.append(abs(sweep) * radius / count)
    return Strokes(
        np.array(starts, dtype=np.complex128),
        np.array(directions, dtype=np.float64),
        np.array(curvatures, dtype=np.float64),
        np.array(lengths, dtype=np.float64),
    )


def turns_around(points: Complex, around: Strokes) -> NDArray[np.int64]:
    """How often closed loops of strokes go around each point, (m,); odd for what they bound.

    The angle under which a stroke is seen is that of its chord, and a whole turn more where the
    point lies between the two.
    """
    first = around.start - points[:, None]
    last = around.end - points[:, None]
    chord = last - first
    cross = first.real * last.imag - first.imag * last.real
    angle = np.arctan2(cross, first.real * last.real + first.imag * last.imag)
    k = around.curvature
    bent = k != 0.0
    centre = around.start + 1j * np.exp(1j * around.direction) / np.where(bent, k, 1.0)
    within = np.abs(points[:, None] - centre) * np.abs(k) < 1.0
    # the chord has the arc to its right where the arc turns left
    right = -(chord.real * -first.imag - chord.imag * -first.real)
    between = bent & within & (right * np.sign(k) > 0.0)
    total = np.sum(angle + 2.0 * math.pi * np.where(between, np.sign(k), 0.0), axis=1)
    return np.asarray(np.rint(total / (2.0 * math.pi)).astype(np.int64))
