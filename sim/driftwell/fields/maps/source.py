"""What a map is made of: potentials and fields at any points, and the distance from conductors."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

Depth = Callable[[Floats], Floats]
"""Distances (n,) of points (n, d) from the nearest surface, m; negative inside conductors."""

_AT_ONCE = 65536


class PotentialSource(Protocol):
    """What a map is made of: e unit solutions; a boundary solution is one.

    Points (n, d) in the map's coordinates, m.
    """

    def potential(self, points: Floats) -> Floats:
        """Potentials (e, n)."""

    def field(self, points: Floats) -> Floats:
        """Fields -grad phi (e, n, d)."""


@dataclass(slots=True)
class Asked:
    """The source, with a count of what it was asked."""

    source: PotentialSource
    count: int = 0
    told: Callable[[int], None] | None = None

    def potential(self, points: Floats) -> Floats:
        return self._in_parts(self.source.potential, points)

    def field(self, points: Floats) -> Floats:
        return self._in_parts(self.source.field, points)

    def _in_parts(self, ask: Callable[[Floats], Floats], points: Floats) -> Floats:
        parts = []
        for start in range(0, max(len(points), 1), _AT_ONCE):  # of no points, none
            some = np.ascontiguousarray(points[start : start + _AT_ONCE])
            parts.append(np.asarray(ask(some), dtype=np.float64))
            self.count += len(some)
            if self.told is not None:
                self.told(self.count)
        return np.concatenate(parts, axis=1)
