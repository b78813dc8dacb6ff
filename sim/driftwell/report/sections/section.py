"""A plane along two coordinate axes, with a grid in it."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.report.paper.ruler import Interval

Floats = NDArray[np.float64]

LONGER, LEAST = 361, 61
"""Points along the longer side, and along the shorter one at the least."""


@dataclass(frozen=True, slots=True)
class Section:
    """A plane and its grid.

    first, second : numbers of the axes across and up
    through : place along the third axis, m
    across, up : (na,) and (nu,) float64, m, rising
    """

    first: int
    second: int
    through: float
    across: Floats
    up: Floats

    @property
    def third(self) -> int:
        """Number of the axis that stands on the plane."""
        return 3 - self.first - self.second

    @property
    def shape(self) -> tuple[int, int]:
        """Of values on the grid."""
        return self.up.size, self.across.size

    @property
    def points(self) -> Floats:
        """All points of the grid, (nu na, 3), m."""
        flat = np.stack(np.meshgrid(self.across, self.up), axis=-1).reshape(-1, 2)
        return self.in_space(flat)

    def in_space(self, flat: Floats) -> Floats:
        """Points (n, 3) of the plane from their coordinates (n, 2) in it."""
        points = np.full((len(flat), 3), self.through)
        points[:, self.first], points[:, self.second] = flat.T
        return points


def section(plane: tuple[int, int], through: float, across: Interval, up: Interval) -> Section:
    """A section with these limits, its points about as far apart along both axes."""
    size = np.array([across[1] - across[0], up[1] - up[0]])
    counts = np.maximum(LEAST, np.ceil(LONGER * size / size.max())).astype(int)
    return Section(*plane, through, np.linspace(*across, counts[0]), np.linspace(*up, counts[1]))
