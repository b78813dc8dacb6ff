"""Charges that are to be born, laid out for the compiled loop in pools.

Not all of them stand in the arrays from the beginning, where they would cost as much as those
alive: a pool is as many as the next births need for a while. Its size follows from how many charges
are alive when the first birth beyond it is due, so that no bit depends on where a call returned.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.particles.state import Particles, joined
from driftwell.particles.unborn import Unborn
from driftwell.stepping.births import BORN, Births
from driftwell.stepping.motion import WAITING, Charges

FEWEST, MOST = 64, 8192
"""Charges of a pool."""
SHARE = 8
"""A pool is this part of the charges alive."""

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Born:
    """Charges born, in the order of time.

    id, cloud : (k,) int64; time : (k,) s; position, velocity : (k, 3), m and m/s (proper), at birth
    weight : (k,) real particles each stands for
    """

    id: NDArray[np.int64]
    cloud: NDArray[np.int64]
    time: Floats
    position: Floats
    velocity: Floats
    weight: Floats


class Pools:
    """The births of a run, and how far they are laid out.

    born : simulated charges born so far
    """

    def __init__(self, unborn: Unborn | None, state: Mapping[str, NDArray[Any]]) -> None:
        """From the beginning, or from a :meth:`state` (empty: none)."""
        self._unborn = unborn
        time = np.zeros(0) if unborn is None else unborn.particles.birth_time
        self._order = np.argsort(time, kind="stable")
        begun = state["pools"].tolist() if state else [0, 0, 0]
        self._first, self._next, self.born = (int(each) for each in begun)
        self._told = 0
        self.births = _laid_out(unborn, self._order[:0], self._order[:0], math.inf)

    def state(self) -> dict[str, NDArray[Any]]:
        """Everything a resume needs besides the cursor and the scenario's own draws, by name."""
        return {"pools": np.array([self._first, self._next, self.born], dtype=np.int64)}

    def to_come(self, cursor: int) -> bool:
        """Whether any is still to be born; cursor : how many of the present pool were due."""
        return self._first + cursor < self._order.size

    def take_up(self, cursor: int) -> None:
        """Take what was due before a state was taken as told of."""
        self._told = cursor

    def admitted(self, cursor: int, alive: int) -> Particles:
        """The next pool, beside those still waiting of the one before; all as they wait."""
        self._first += cursor
        self._told = 0
        begin = self._next
        size = max(FEWEST, min(MOST, alive // SHARE))
        self._next = min(begin + size, self._order.size)
        chosen = np.zeros(self._order.size, dtype=np.bool_)
        chosen[self._order[begin : self._next]] = True
        if self._unborn is None:
            raise ValueError("nothing is to be born")
        made = self._unborn.particles.kept(chosen)
        return replace(made, velocity=np.zeros_like(made.velocity))

    def lay_out(self, particles: Particles, charges: Charges, cursor: int) -> None:
        """Make those that wait stand among the charges of `particles` as they must."""
        if self._unborn is None:
            return
        pool = self._order[self._first : self._next]
        ids = self._unborn.particles.id[pool]
        index = np.searchsorted(particles.id, ids)
        horizon = math.inf
        if self._next < self._order.size:
            horizon = float(self._unborn.particles.birth_time[self._order[self._next]])
        self.births = _laid_out(self._unborn, pool, index, horizon)
        waiting = index[cursor:]
        charges.alive[waiting] = WAITING
        charges.charge[waiting] = charges.weight[waiting] = 0.0
        charges.charge_to_mass[:, waiting] = 0.0
        charges.velocity[:, waiting] = 0.0

    def take_born(self, cursor: int) -> Born | None:
        """Those born since the last call; None where there are none."""
        if cursor == self._told or self._unborn is None:
            return None
        new = np.flatnonzero(self.births.fate[self._told : cursor] == BORN) + self._told
        self._told = cursor
        if not new.size:
            return None
        self.born += int(new.size)
        those = self._order[self._first + new]
        found = self._unborn.particles
        return Born(
            found.id[those],
            found.cloud[those],
            found.birth_time[those],
            found.position[:, those].T,
            found.velocity[:, those].T,
            found.weight[those],
        )


def merged(particles: Particles, more: Particles) -> Particles:
    """Two sets as one, in the order of ids."""
    both = joined([particles, more])
    order = np.argsort(both.id, kind="stable")
    return Particles(
        np.ascontiguousarray(both.position[:, order]),
        np.ascontiguousarray(both.velocity[:, order]),
        *(
            getattr(both, name)[order]
            for name in ("charge", "mass", "weight", "id", "species", "cloud", "birth_time")
        ),
    )


def _laid_out(
    unborn: Unborn | None,
    pool: NDArray[np.int64],
    index: NDArray[np.int64],
    horizon: float,
) -> Births:
    """The births of a pool; of charges that are lost again the index means nothing."""
    if unborn is None:
        none = np.zeros(0)
        none3 = np.zeros((3, 0))
        fate = np.zeros(0, dtype=np.int8)
        return Births(
            none, index, none3, none, none, none, none3, none, none, fate, np.array([horizon])
        )
    found = unborn.particles
    return Births(
        found.birth_time[pool],
        index.astype(np.int64),
        np.ascontiguousarray(found.velocity[:, pool]),
        (found.charge * found.weight)[pool],
        found.weight[pool],
        (found.charge / found.mass)[pool],
        np.ascontiguousarray(unborn.normal[:, pool]),
        unborn.demand[pool],
        unborn.chance[pool],
        np.zeros(pool.size, dtype=np.int8),
        np.array([horizon]),
    )
