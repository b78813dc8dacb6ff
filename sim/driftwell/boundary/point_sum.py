"""Potentials and fields of many points' charges at all of them, by the tree."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels.threads import on_threads
from driftwell.tree.gathering import tree_room
from driftwell.tree.stages import tree_field

Floats = NDArray[np.float64]

ORDER, TOLERANCE, LEAF = 8, 1e-5, 32
"""Of the tree's expansions; with them potentials err by about 1e-7 of their size."""


class PointSum:
    """Sums over fixed places, with charges that change."""

    def __init__(
        self, place: Floats, threads: int, order: int = ORDER, tolerance: float = TOLERANCE
    ) -> None:
        """place : (n, 3), m; charges and those who only feel."""
        self._place = np.ascontiguousarray(place.T)
        self._threads = threads
        self._charge = np.zeros(len(place))
        self._found = np.empty((4, len(place)))
        with on_threads(threads) as count:
            self._work = tree_room(len(place), count, LEAF, tolerance, order, False, False)

    def __call__(self, charge: Floats) -> Floats:
        """(4, n): fields and potential, without 1/(4 pi eps0); overwritten by the next call.

        charge : (k,) of the first k places; the others have none
        """
        self._charge[: len(charge)] = charge
        self._charge[len(charge) :] = 0.0
        with on_threads(self._threads):
            tree_field(self._place, self._charge, 0.0, 1.0, self._work, self._found)
        return self._found
