"""The pair sum of a run: which one it is, why, and how it is called.

The one place that chooses. Few charges are summed directly, many by the tree; where the border
lies is settled once, at the run's start, and kept with its record. From then on the choice follows
from that number and the charges left, so that a run goes on as it would have gone on unbroken,
on any machine and any number of threads.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import astuple, dataclass, fields, replace
from functools import partial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.crossover import LEAST, Contest, crossover
from driftwell.coulomb.direct import (
    SMALL,
    THREADED,
    direct_sum,
    workspace,
    workspace_shape,
)
from driftwell.coulomb.form import MIXED_ACCURACY, Coulomb
from driftwell.coulomb.frame_table import ROWS
from driftwell.coulomb.pair_sum import PairSum
from driftwell.coulomb.periodic.direct import periodic_direct_sum, periodic_size, periodic_workspace
from driftwell.coulomb.periodic.sampled import sampled_periodic_field
from driftwell.coulomb.periodic.tree import periodic_tree_sum, periodic_tree_workspace
from driftwell.coulomb.potential import potentials, threaded_potentials
from driftwell.coulomb.sampled import sampled_field
from driftwell.coulomb.sampled_error import SampledField
from driftwell.coulomb.tree import (
    TreeSettings,
    settings_for,
    tightened,
    tree_sum,
    tree_workspace,
)

Floats = NDArray[np.float64]

NEVER = 1 << 62
"""The crossover of a run that is summed directly whatever the number of its charges."""
TREE_PAIRS = 300
"""Pairs, times the order, in whose time the tree sums one charge: what work is counted by."""
TREE_BYTES, TREE_START = 500, 1_000_000
"""Bytes a charge takes in the tree's work space, at the most, and what any tree takes besides."""
PERIODIC_START = 12_000_000
"""Bytes that the far images take in the tree of a cell."""
_CERTAIN = 50_000
"""From this many charges on the automatic choice is surely the tree."""


@dataclass(frozen=True, slots=True)
class Manner:
    """How a run sums: settled at its start, and changed only where the sum errs too much.

    crossover : charges from which on the tree is used
    settings : of the tree; None where it never is used
    tree_mixed, direct_mixed : whether pairs are summed in mixed precision
    """

    crossover: int
    settings: TreeSettings | None
    tree_mixed: bool
    direct_mixed: bool

    def state(self) -> dict[str, NDArray[Any]]:
        """All of it as arrays by name."""
        settings = () if self.settings is None else astuple(self.settings)
        return {
            "crossover": np.array(self.crossover, dtype=np.int64),
            "mixed": np.array([self.tree_mixed, self.direct_mixed], dtype=np.int64),
            "settings": np.array(settings, dtype=np.float64),
        }


def manner_of(state: Mapping[str, NDArray[Any]]) -> Manner:
    """The manner whose :meth:`Manner.state` this is."""
    settings = None
    if state["settings"].size:
        kinds = (int, int, float)
        values = [
            kind(value) for kind, value in zip(kinds, state["settings"].tolist(), strict=True)
        ]
        names = [each.name for each in fields(TreeSettings)]
        settings = TreeSettings(**dict(zip(names, values, strict=True)))
    tree_mixed, direct_mixed = (bool(each) for each in state["mixed"].tolist())
    return Manner(int(state["crossover"]), settings, tree_mixed, direct_mixed)


def manner_for(form: Coulomb, n: int, threads: int) -> Manner:
    """How a run that begins with `n` charges sums; may time both sums on this machine."""
    direct_mixed = form.precision == "mixed"
    tree_mixed = form.precision != "double" and form.accuracy >= MIXED_ACCURACY
    if form.method in {"direct", "off"} or (form.method == "auto" and n < LEAST):
        return Manner(NEVER, None, False, direct_mixed)
    settings = settings_for(form.accuracy)
    border = SMALL + 1
    if form.method == "auto":
        softened = form.softening > 0.0
        border = crossover(Contest(settings, softened, tree_mixed, direct_mixed, threads))
    return Manner(border, settings, tree_mixed, direct_mixed)


class Summation:
    """The pair sum of one run: which one, with what settings, and the room it works in.

    Attributes
    ----------
    method : "direct", "tree" or "off", what is really used
    because : in words, for the user
    settings : of the tree; None where another sum is used
    manner : what the choice follows from; kept with the run's record
    exact : whether the sum errs by rounding only
    pair_sum, work : what the time loop calls, and the work space it hands over
    """

    method: str
    because: str
    settings: TreeSettings | None
    pair_sum: PairSum
    work: Floats

    def __init__(
        self,
        form: Coulomb,
        n: int,
        threads: int,
        settings: TreeSettings | None = None,
        manner: Manner | None = None,
        cell: Cell | None = None,
    ) -> None:
        """The sum for `n` charges; `settings` take the place of the manner's where given.

        cell : what repeats; None: every charge is there once
        """
        self.manner = manner_for(form, n, threads) if manner is None else manner
        if cell is not None:
            self.manner = replace(self.manner, direct_mixed=False)
        self._cell = cell
        if settings is not None:
            self.manner = replace(self.manner, settings=settings)
        self._form, self._n, self._threads = form, n, threads
        self._softening2 = form.softening**2
        self.settings = None
        self.mixed = False
        if form.method == "off":
            self.method, self.because = "off", "the charges do not feel each other"
            self.pair_sum, self.work = direct_sum(0, threads), workspace(0)
        elif n >= self.manner.crossover and self.manner.settings is not None:
            self.method, self.settings = "tree", self.manner.settings
            self.mixed = self.manner.tree_mixed
            softened = form.softening > 0.0
            if cell is None:
                self.pair_sum = tree_sum()
                self.work = tree_workspace(n, threads, self.settings, softened, self.mixed)
            else:
                self.pair_sum = periodic_tree_sum()
                self.work = periodic_tree_workspace(
                    n, threads, self.settings, cell, softened, self.mixed
                )
            self.because = self._why()
        else:
            self.method = "direct"
            self.mixed = self.manner.direct_mixed and n > SMALL
            if cell is None:
                self.pair_sum = direct_sum(n, threads, self.mixed)
                self.work = workspace(n)
            else:
                self.pair_sum = periodic_direct_sum(n, threads)
                self.work = periodic_workspace(n, cell)
            self.because = self._why()

    @property
    def exact(self) -> bool:
        """Whether the sum errs by rounding only."""
        return self.method == "off" or (self.method == "direct" and not self.mixed)

    @property
    def pairs(self) -> float:
        """Work of one sum, in pairs of the direct one (of which it takes n^2)."""
        if self.settings is None:
            return float(self._n) * self._n
        return float(self._n) * min(self._n, TREE_PAIRS * self.settings.order)

    @property
    def gives_potential(self) -> bool:
        """Whether the sum fills a fourth row with potentials."""
        return self.method == "tree" or (self.method == "direct" and self._cell is not None)

    @property
    def sampled_field(self) -> SampledField:
        """The true field at some charges, which the sum is judged by."""
        return sampled_field if self._cell is None else partial(sampled_periodic_field, self._cell)

    @property
    def constant(self) -> float:
        """1/(4 pi eps0), N m^2/C^2."""
        return COULOMB_CONSTANT

    @property
    def softening2(self) -> float:
        """Square of the softening length, m^2."""
        return self._softening2

    def laid_out(self, n: int) -> Summation:
        """The same run's sum for another number of charges."""
        if n == self._n:
            return self
        return Summation(self._form, n, self._threads, manner=self.manner, cell=self._cell)

    def tightened(self, factor: float) -> Summation:
        """The sum with an error smaller by `factor`; itself where it cannot be."""
        manner = self.manner
        if self.method == "tree" and self.settings is not None:
            manner = replace(manner, settings=tightened(self.settings, factor))
        elif self.mixed:
            manner = replace(manner, direct_mixed=False)
        if manner == self.manner:
            return self
        return Summation(self._form, self._n, self._threads, manner=manner, cell=self._cell)

    def field(self, position: Floats, charge: Floats, out_field: Floats) -> None:
        """The field of all charges at each, V/m; (3, n), (n,), and (3, n), overwritten."""
        if self.method == "off":
            out_field[...] = 0.0
            return
        self.pair_sum(position, charge, self._softening2, COULOMB_CONSTANT, self.work, out_field)

    def potential(self, position: Floats, charge: Floats, out_potential: Floats) -> None:
        """The potential of all others at each charge, V; `out_potential` (n,), overwritten."""
        if self.method == "off":
            out_potential[...] = 0.0
        elif self.gives_potential:
            found = np.empty((4, self._n))
            self.pair_sum(position, charge, self._softening2, COULOMB_CONSTANT, self.work, found)
            out_potential[...] = found[3]
        else:
            threaded = self._threads > 1 and self._n >= THREADED
            summed = threaded_potentials if threaded else potentials
            summed(position, charge, self._softening2, COULOMB_CONSTANT, out_potential)

    def _why(self) -> str:
        border, n = self.manner.crossover, self._n
        charges = f"{n} charge{'s' * (n != 1)}"
        if self.method == "tree":
            to = f"to {self._form.accuracy:g} of the force"
            if self._form.method == "tree":
                return f"the scenario says so; {to}"
            return f"{to}; {charges}, and here it is faster than the direct sum from {border} on"
        if self._form.method == "direct":
            return "the scenario says so"
        if self._form.method == "tree":
            return f"{charges} need no tree"
        if border == NEVER:
            return f"{charges}, too few for a tree to pay"
        return f"{charges}, and here the tree is faster only from {border} on"


def room_in_bytes(form: Coulomb, n: int, cell: bool = False) -> int:
    """Bytes of the sum's work space for `n` charges, at the most; `cell`: they repeat."""
    if form.method == "off":
        return 0
    framed = 8 * ROWS * n if form.frame == "bunch" else 0
    direct = 8 * math.prod(workspace_shape(n)) + framed
    tree = TREE_START + TREE_BYTES * n + framed
    if cell:
        direct, tree = 8 * periodic_size(n), tree + PERIODIC_START
    if form.method == "direct" or n < LEAST:
        return direct
    if form.method == "tree" or n >= _CERTAIN:
        return tree
    return max(direct, tree)


def pairs_in_one_sum(form: Coulomb, n: int) -> float:
    """Pairs whose time one sum takes, about: each once, or what the tree makes of them."""
    if form.method == "off":
        return 0.0
    every = 0.5 * n * (n - 1)
    if form.method == "direct" or n < LEAST:
        return every
    return min(every, 0.5 * n * TREE_PAIRS * settings_for(form.accuracy).order)
