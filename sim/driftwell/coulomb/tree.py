"""The tree sum of Coulomb's law: a fast multipole method, of cost n, with the third law kept.

The charges are sorted into a tree of cells (build.py) that are measured from the leaves up
(measure.py); each cell then gathers from all others (walk.py), by expansions where these
err little against the field that is there (verdict.py, scale.py), else charge by charge.
Both cells of a pair use the same truncated form, so the forces between them cancel to rounding.

The result is a function of the charges and the settings alone. Threads take whole tasks, whose
number and bounds depend on the charges; each charge's terms are added in an order that does not
depend on the thread, so the bits are the same on any number.

References
----------
L. Greengard and V. Rokhlin, J. Comput. Phys. 73 (1987) 325 (fast multipole method).
W. Dehnen, J. Comput. Phys. 179 (2002) 27; Comput. Astrophys. Cosmol. 1 (2014) 1 (mutual form).
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.kernels.pointers import CompiledFunction
from driftwell.tree.gathering import tree_room
from driftwell.tree.stages import tree_field

LEAF_SIZE = 32
"""Charges in a leaf."""
_ORDERS = ((3e-3, 6), (3e-6, 8), (2e-7, 10), (0.0, 12))
"""The order that costs least, from an accuracy on."""
_ERRORS = {6: 6e-4, 8: 4e-4, 10: 3e-4, 12: 2e-4}
"""Rms relative errors of the hardest cloud at a tolerance of :data:`_REFERENCE`, by order."""
_REFERENCE = 1e-3
_SLOPE = 0.75
"""They grow with this power of the tolerance."""
_SHARE = 0.6
"""Of the accuracy, what is aimed at."""


@dataclass(frozen=True, slots=True)
class TreeSettings:
    """How finely the tree sums.

    order : of the expansions, 3 to 14
    leaf : most charges in a leaf, a multiple of 16
    tolerance : error allowed to the force between two cells, relative to the field that is there
    """

    order: int
    leaf: int
    tolerance: float

    def __post_init__(self) -> None:
        if not 3 <= self.order <= 14 or self.leaf <= 0 or self.leaf % 16 != 0:
            raise ValueError(
                f"order {self.order}, leaf {self.leaf}: the order is 3 to 14,"
                " a leaf holds a multiple of 16"
            )


def settings_for(accuracy: float) -> TreeSettings:
    """Settings whose rms relative force error is below `accuracy`, 1e-8 to 1e-1.

    Measured with clouds of both signs; those of one sign err three to six times less. In a crystal
    of both signs, where the pushes of neighbours cancel, the error may be several times larger.
    """
    order = next(order for least, order in _ORDERS if accuracy >= least)
    share = _SHARE * accuracy / _ERRORS[order]
    return TreeSettings(order, LEAF_SIZE, _REFERENCE * share ** (1.0 / _SLOPE))


def tightened(settings: TreeSettings, factor: float) -> TreeSettings:
    """Settings whose rms error is smaller by about `factor`.

    Below 1 it is larger, and the order stays, so that nothing need be compiled.
    """
    if factor < 1.0:
        return replace(settings, tolerance=settings.tolerance / factor ** (1.0 / _SLOPE))
    return settings_for(reached(settings) / _SHARE / factor)


def reached(settings: TreeSettings) -> float:
    """The rms relative error of the hardest cloud."""
    return float(_ERRORS[settings.order] * (settings.tolerance / _REFERENCE) ** _SLOPE)


def tree_workspace(
    n: int, threads: int, settings: TreeSettings, softened: bool = False, mixed: bool = False
) -> NDArray[np.float64]:
    """(1, size) float64, work space for the sums of `n` charges, with potentials or without.

    It says how the tree sums: with what settings, whether softened, and whether near pairs are
    taken in mixed precision. It holds an address, and is of no use to another process.
    """
    return tree_room(n, threads, settings.leaf, settings.tolerance, settings.order, softened, mixed)


def tree_sum() -> PairSum:
    """The tree sum as the time loop takes it, with a work space of :func:`tree_workspace`.

    Where its last argument is (4, n), it holds E_x, E_y, E_z and the potential, V.
    """
    return CompiledFunction(tree_field, SIGNATURE)
