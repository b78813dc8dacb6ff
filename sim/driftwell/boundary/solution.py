"""What every solver of the electrodes' potential gives: one unit solution per electrode."""

from __future__ import annotations

from typing import NamedTuple, Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


class Panels(NamedTuple):
    """The pieces of surface that carry the charge, for pictures and for Gauss's law.

    position : (k, d) float64, m, their middles; (r, z), (x, y) or (x, y, z)
    size : (k,) float64, area, m^2; of planar geometry: length in the plane, m
    electrode : (k,) int64, whose they are
    density : (e, k) float64, C/m^2, where one electrode has 1 V and the others none
    """

    position: Floats
    size: Floats
    electrode: NDArray[np.int64]
    density: Floats


class Solution(Protocol):
    """Unit solutions: one electrode at 1 V, all others at 0 V, for each of e electrodes.

    Attributes
    ----------
    capacitance : (e, e) float64, F (planar: F/m): charge of the first for 1 V on the second;
        symmetric to the solution's own error
    error : of drawn electrodes, the largest error of the potential seen on their surfaces, V per V;
        of those in space, the rms difference from a coarser solution, of potentials or of fields
        in parts of their rms, whichever is more
    panels : where the charge sits
    mirrors : for each coordinate, whether every unit solution is even in it
    """

    @property
    def capacitance(self) -> Floats: ...
    @property
    def error(self) -> float: ...
    @property
    def panels(self) -> Panels: ...
    @property
    def mirrors(self) -> tuple[bool, ...]: ...

    def potential(self, points: Floats) -> Floats:
        """Potentials (e, n), V per V, at points (n, d), m; d = 2 for (r, z) and (x, y), else 3."""

    def field(self, points: Floats) -> Floats:
        """Fields -grad phi (e, n, d), 1/m, at points (n, d)."""

    def arrays(self) -> dict[str, NDArray[np.generic]]:
        """All of it by name, to be kept; the class method `from_arrays` makes it again."""
