"""Trees as they are left in the work space, and charges in hard arrangements."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import cache

import numba
import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.tree import TreeSettings, settings_for, tree_sum, tree_workspace
from driftwell.kernels.threads import on_threads
from driftwell.tree.cells import RIGHT, Tree, tree_in

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]
Placement = Callable[[int], Floats]
"""Number of charges -> places (3, n)."""

SETTINGS = settings_for(1e-2)


@numba.njit  # type: ignore[untyped-decorator]
def _tree_of(work: Floats) -> Tree:
    """What has no way in from Python, with one."""
    return tree_in(work)


@dataclass(frozen=True)
class Grown:
    """One tree after its sum.

    field : (3, n); cells : numbers of the cells; tree : all its arrays
    """

    place: Floats
    charge: Floats
    field: Floats
    tree: Tree
    leaf: int

    @property
    def count(self) -> int:
        """Number of cells."""
        return 2 * -(-self.charge.size // self.leaf) - 1

    def right(self, cell: int) -> int:
        """The right child, 0 for a leaf."""
        return int(self.tree.cells[cell, RIGHT])

    def last(self, cell: int) -> int:
        """The last leaf of a cell."""
        while self.right(cell):
            cell = self.right(cell)
        return cell

    def charges(self, cell: int) -> Ints:
        """Which charges are in a cell."""
        found: Ints = self.tree.order[self.tree.first[cell] : self.tree.first[self.last(cell) + 1]]
        return found

    @property
    def unit(self) -> float:
        """Tree's units in one of the places'."""
        farthest = float(np.abs(self.place).max())
        return float(2.0 ** -np.frexp(farthest)[1]) if farthest > 0.0 else 1.0


def grown(
    place: Floats, charge: Floats | None = None, threads: int = 1, leaf: int = SETTINGS.leaf
) -> Grown:
    """The tree of such charges, of 1 each if nothing else is said, and their field."""
    q = np.ones(place.shape[1]) if charge is None else charge
    settings = TreeSettings(SETTINGS.order, leaf, SETTINGS.tolerance)
    field = np.full_like(place, 7.0)
    with on_threads(threads) as given:
        work = tree_workspace(q.size, given, settings, mixed=True)
        tree_sum()(place, q, 0.0, 1.0, work, field)
    return Grown(place, q, field, _tree_of(work), leaf)


def uniform(n: int) -> Floats:
    """In a cube."""
    return np.random.default_rng(n).uniform(-1.0, 1.0, (3, n))


def string(n: int) -> Floats:
    """Exactly on a line along no axis."""
    return np.outer([1.0, -0.3, 0.02], np.random.default_rng(n).normal(size=n))


def sheet(n: int) -> Floats:
    """Exactly in a plane."""
    place = uniform(n)
    place[2] = 0.7
    return place


def one_point(n: int) -> Floats:
    """All at one place."""
    return np.tile(np.array([[0.3], [-1e-3], [7.0]]), n)


def two_points(n: int) -> Floats:
    """Some here, the others there."""
    place = np.zeros((3, n))
    place[1, n // 3 :] = 1.0
    return place


def crowding(n: int) -> Floats:
    """Towards a point over three hundred powers of two, along a diagonal."""
    return np.outer([1.0, 1.0, -1.0], 0.5 ** np.linspace(0.0, 300.0, n))


def spirals(n: int) -> Floats:
    """Towards a point in all directions, over sixty powers of ten."""
    random = np.random.default_rng(n)
    return np.asarray(random.normal(size=(3, n)) * 10.0 ** random.uniform(-60.0, 0.0, n))


def lone(n: int) -> Floats:
    """All in a ball, but one, far away."""
    place = uniform(n)
    place[:, n // 2] = [1e12, -3e11, 1.0]
    return place


def pairs(n: int) -> Floats:
    """Each place twice."""
    half = uniform(-(-n // 2))
    return np.ascontiguousarray(np.hstack([half, half])[:, :n])


def lattice(n: int) -> Floats:
    """Equal coordinates by hundreds."""
    side = int(np.ceil(n ** (1.0 / 3.0)))
    every = np.array(np.unravel_index(np.arange(n), (side, side, side)), dtype=np.float64)
    return np.ascontiguousarray(every[:, np.random.default_rng(n).permutation(n)])


PLACEMENTS: dict[str, Placement] = {
    "uniform": uniform,
    "string": string,
    "sheet": sheet,
    "one point": one_point,
    "two points": two_points,
    "crowding": crowding,
    "spirals": spirals,
    "lone": lone,
    "pairs": pairs,
    "lattice": lattice,
}


@cache
def example(name: str, n: int) -> Grown:
    """A placement's tree, with charges of both signs and without, grown once for all tests."""
    charge = np.random.default_rng(n).uniform(-1.0, 2.0, n)
    charge[::7] = 0.0
    return grown(PLACEMENTS[name](n), charge)
