"""Elements on drawn electrodes: exact pieces of the outline, graded towards edges and corners.

Strokes that continue each other's direction make a chain; elements lie on chains. Where the field
fills the angle w at a corner or an edge, the charge density behaves like distance to the power
pi/w - 1. An element there is parametrised by

    s = s0 + L u^m                                                                          (1)

so that sigma ds/du begins like u^(m pi/w - 1). m is chosen to make that an integer power; along the
edge of a thin sheet (w = 2 pi) m is 2, along the outer edge of a box (w = 3 pi/2) 3, and every
term of the density is then a polynomial in u. Towards a tip on the axis of revolution the potential
is like distance^nu, P_nu(cos w) = 0, where the field fills a cone of half angle w.

References
----------
Behaviour at corners: J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 2.11;
at tips: sec. 3.4.
"""

from __future__ import annotations

import itertools
import math
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray
from scipy.special import hyp2f1

from driftwell.boundary.drawn_rows import place
from driftwell.boundary.drawn_surface import SAME_PLACE, Surface, field_angles, vertices
from driftwell.geometry.strokes import Strokes, joined
from driftwell.kernels import kernel

Floats = NDArray[np.float64]
Integers = NDArray[np.int64]

ORDER = 12
"""Nodes of an element."""
_STRAIGHT = 1e-6
"""Angle, rad, by which strokes that continue each other may differ."""
_BEND = 0.02
"""Change of curvature, times the shorter length, above which an element ends between strokes."""
_MOST_TURN = 0.5 * math.pi * (1.0 + 1e-6)
_STEEPEST = 4.0
"""Largest exponent m."""


@dataclass(frozen=True, slots=True)
class Elements:
    """k elements; tables as described in drawn_rows.py, in units of the electrodes' size.

    arcs : (a, 6) float64; spans : (k, 8) float64; chain : (k, 2) int64
    electrode : (k,) int64
    """

    arcs: Floats
    spans: Floats
    chain: Integers
    electrode: Integers

    def __len__(self) -> int:
        return len(self.spans)

    def lengths(self) -> Floats:
        """(k,), along the outline."""
        m = self.spans[:, 2]
        return np.asarray(
            np.abs(self.spans[:, 1]) * (self.spans[:, 4] ** m - self.spans[:, 3] ** m)
        )

    def halved(self, which: NDArray[np.bool_]) -> Elements:
        """The elements, some of them in two halves of the parameter u."""
        count = np.where(which, 2, 1)
        origin = np.repeat(np.arange(len(self)), count)
        second = np.zeros(len(origin), dtype=bool)
        second[1:] = origin[1:] == origin[:-1]
        spans = self.spans[origin]
        middle = 0.5 * (spans[:, 3] + spans[:, 4])
        spans[:, 4] = np.where(which[origin] & ~second, middle, spans[:, 4])
        spans[:, 3] = np.where(second, middle, spans[:, 3])
        return replace(
            self, spans=spans, chain=self.chain[origin], electrode=self.electrode[origin]
        ).encircled()

    def encircled(self) -> Elements:
        """The elements with the circles around them."""
        points, _ = self.places(np.linspace(-1.0, 1.0, 9))
        middle = 0.5 * (points.min(axis=1) + points.max(axis=1))
        radius = np.hypot(*(points - middle[:, None]).transpose(2, 0, 1)).max(axis=1)
        spans = self.spans.copy()
        spans[:, 5:7], spans[:, 7] = middle, radius
        return replace(self, spans=spans)

    def along(self, t: Floats) -> Floats:
        """Positions (k, n) on their chains at the parameters t (n,) in [-1, 1]: equation (1)."""
        return np.asarray(
            self.spans[:, 0:1] + self.spans[:, 1:2] * self._u(t) ** self.spans[:, 2:3]
        )

    def _u(self, t: Floats) -> Floats:
        return 0.5 * (self.spans[:, 3:4] * (1.0 - t) + self.spans[:, 4:5] * (1.0 + t))

    def places(self, t: Floats) -> tuple[Floats, Floats]:
        """Points (k, n, 2) at the parameters t (n,) in [-1, 1], and ds/dt (k, n)."""
        s = self.along(t)
        m = self.spans[:, 2:3]
        rate = np.abs(self.spans[:, 1:2]) * m * self._u(t) ** (m - 1.0)
        rate *= 0.5 * (self.spans[:, 4:5] - self.spans[:, 3:4])
        out = np.empty((*s.shape, 2))
        places_along(s, self.chain, self.arcs, out)
        return out, rate


@kernel
def places_along(s: np.ndarray, chain: np.ndarray, arcs: np.ndarray, out: np.ndarray) -> None:
    """Overwrite ``out[e, j]`` by the point at position ``s[e, j]`` of element e's chain."""
    for e in range(s.shape[0]):
        for j in range(s.shape[1]):
            x, y = place(s[e, j], chain[e, 0], chain[e, 1], arcs)
            out[e, j, 0] = x
            out[e, j, 1] = y


def exponent(angle: float) -> float:
    """m of equation (1), where the field fills `angle`, rad."""
    if angle < math.pi + _STRAIGHT:
        # density that vanishes at the corner: a smooth power, or one that is made smoother
        power = math.pi / max(angle, 0.1)
        return 1.0 if abs(power - round(power)) < _STRAIGHT else max(1.0, 2.0 / power)
    power = math.pi / angle
    for whole in (1, 2, 3):
        m = whole / power
        if m <= _STEEPEST and abs(m - round(m)) < _STRAIGHT:
            return float(round(m))
    return min(2.0 / power, _STEEPEST)


def cone_power(opening: float) -> float:
    """The least nu > 0 with P_nu(cos(opening)) = 0: near a tip the potential is like distance^nu.

    opening : half angle, rad, of the cone that the field fills, less than pi
    """

    from scipy.optimize import brentq

    def legendre(nu: float) -> float:
        return float(hyp2f1(-nu, nu + 1.0, 1.0, 0.5 * (1.0 - math.cos(opening))))

    # the first zero lies near 2.405 / opening - 1/2; for needles at 1 / (2 ln(2 / half angle))
    low, step = 1e-3, 0.02
    while legendre(low + step) > 0.0:
        low += step
    return float(brentq(legendre, low, low + step))


def tip_exponent(leaving: float, metal: NDArray[np.bool_]) -> float:
    """m of equation (1) at a tip on the axis, which a stroke leaves in this direction, rad.

    metal : whether there is metal to its left, towards +z, and to its right
    """
    if abs(math.sin(leaving)) < _STRAIGHT:
        return 1.0
    from_z = math.acos(math.sin(leaving))
    openings = [from_z, math.pi - from_z]
    opening = max(angle for angle, filled in zip(openings, metal, strict=True) if not filled)
    if opening < 0.1 or opening > math.pi - 1e-3:
        return 1.0 if opening < 0.1 else _STEEPEST
    power = cone_power(opening)
    return min(max(1.0, (1.0 if power < 1.0 else 2.0) / power), _STEEPEST)


@dataclass(slots=True)
class _Ends:
    """The two ends (start, end) of each stroke: where, and what follows there."""

    vertex: Integers
    m: Floats
    next_end: Integers
    """The end at which the chain goes on, or -1."""


def _ends(surface: Surface, axisymmetric: bool) -> _Ends:
    """What happens at both ends of each stroke; end 2 i is the start, 2 i + 1 the end of i."""
    pieces = surface.strokes
    count = len(pieces)
    where = np.stack([pieces.start, pieces.end], axis=1).ravel()
    leaving = np.stack([pieces.direction, pieces.last_direction + math.pi], axis=1).ravel()
    # seen from its end a stroke has left and right exchanged
    metal = np.stack([surface.metal, surface.metal[:, ::-1]], axis=1).reshape(-1, 2)
    vertex = vertices(where)
    m, following = np.ones(2 * count), np.full(2 * count, -1, dtype=np.int64)
    order = np.argsort(vertex, kind="stable")
    for group in np.split(order, np.flatnonzero(np.diff(vertex[order])) + 1):
        if axisymmetric and abs(where[group[0]].real) <= SAME_PLACE:
            m[group] = [
                tip_exponent(*of_end) for of_end in zip(leaving[group], metal[group], strict=True)
            ]
            continue
        angles = field_angles(leaving[group], metal[group, 0])
        if len(group) == 2 and abs(angles.max() - math.pi) < _STRAIGHT:
            turned = leaving[group[1]] - leaving[group[0]]
            if abs(math.cos(turned) + 1.0) < _STRAIGHT**2:
                following[group] = group[::-1]
                continue
        m[group] = [exponent(float(angle)) for angle in angles]
    return _Ends(vertex, m, following)


def _chains(ends: _Ends) -> list[list[int]]:
    """Chains of strokes, each a list of the ends at which they are entered."""
    count = len(ends.vertex) // 2
    used = np.zeros(count, dtype=bool)
    chains = []
    openings = [end for end in range(2 * count) if ends.next_end[end] < 0]
    for entry in [*openings, *range(0, 2 * count, 2)]:
        end, walked = entry, []
        while end >= 0 and not used[end // 2]:
            used[end // 2] = True
            walked.append(end)
            end = int(ends.next_end[end ^ 1])
        if walked:
            chains.append(walked)
    return chains


def _sections(
    chain: Strokes, at_start: float, at_end: float
) -> list[tuple[float, float, float, float]]:
    """Parts of a chain between which density may bend: from, to, exponents at both."""
    joints = np.concatenate([[0.0], np.cumsum(chain.length)])
    jump = np.abs(np.diff(chain.curvature))
    shorter = np.minimum(chain.length[:-1], chain.length[1:])
    bent = joints[1:-1][jump * shorter > _BEND]
    borders = [0.0, *bent.tolist(), float(joints[-1])]
    sections = []
    for first, last in itertools.pairwise(borders):
        inside = np.clip(np.minimum(joints[1:], last) - np.maximum(joints[:-1], first), 0.0, None)
        parts = max(1, math.ceil(float(np.sum(np.abs(chain.curvature) * inside)) / _MOST_TURN))
        cuts = np.linspace(first, last, parts + 1)
        for a, b in itertools.pairwise(cuts):
            m_a = at_start if a == 0.0 else 1.0
            m_b = at_end if b == borders[-1] else 1.0
            sections.append((float(a), float(b), m_a, m_b))
    return sections


def elements_on(surface: Surface, axisymmetric: bool) -> Elements:
    """The coarsest elements of a surface: between corners, and two where both ends are graded."""
    ends = _ends(surface, axisymmetric)
    backwards = surface.strokes.reversed()
    arcs: list[Floats] = []
    spans, chains, electrode = [], [], []
    for walked in _chains(ends):
        chain = joined(
            [
                (backwards if end % 2 else surface.strokes).taken(np.array([end // 2]))
                for end in walked
            ]
        )
        first = sum(len(part) for part in arcs)
        starts = np.concatenate([[0.0], np.cumsum(chain.length)[:-1]])
        arcs.append(
            np.stack(
                [
                    starts,
                    chain.start.real,
                    chain.start.imag,
                    np.cos(chain.direction),
                    np.sin(chain.direction),
                    chain.curvature,
                ],
                axis=1,
            )
        )
        for a, b, m_a, m_b in _sections(
            chain, float(ends.m[walked[0]]), float(ends.m[walked[-1] ^ 1])
        ):
            middle = 0.5 * (a + b)
            found = [(a, b - a, m_a)]
            if m_b != 1.0:
                found = [(a, middle - a, m_a), (b, middle - b, m_b)]
                if m_a == 1.0:
                    found = [(b, a - b, m_b)]
            spans += [[s, reach, m, 0.0, 1.0, 0.0, 0.0, 0.0] for s, reach, m in found]
            chains += [[first, first + len(chain) - 1]] * len(found)
            electrode += [int(surface.electrode[walked[0] // 2])] * len(found)
    return Elements(
        np.concatenate(arcs),
        np.array(spans),
        np.array(chains, dtype=np.int64),
        np.array(electrode, dtype=np.int64),
    ).encircled()
