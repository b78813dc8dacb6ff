"""A pair sum that errs by a known amount, in the tree's place: promises can be broken with it.

The push between charges i and j is made larger or smaller by the part e, by turns, both ways alike,
so that the third law holds. e is the settings' tolerance, and grows with the mean square distance
of the charges from the origin: a cloud that swells makes the sum worse while the run goes on.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, replace

import numpy as np
import pytest
from numpy.typing import NDArray

from driftwell.coulomb import summation
from driftwell.coulomb.pair_sum import SIGNATURE, PairSum
from driftwell.coulomb.tree import TreeSettings
from driftwell.kernels import inner_pair_kernel, pair_kernel
from driftwell.kernels.pointers import CompiledFunction

SIZE = 1e-3
"""m, where the error is the tolerance itself."""


@dataclass
class Inexact:
    """What the inexact sum is set to when a run begins, and how far it can be changed.

    loosens : by how much more than asked it is loosened; 0 where it cannot be
    """

    tolerance: float = 1e-5
    best: float = 0.0
    loosens: float = 0.0

    def settings_for(self, accuracy: float) -> TreeSettings:
        return TreeSettings(4, 32, self.tolerance)

    def tightened(self, settings: TreeSettings, factor: float) -> TreeSettings:
        if factor < 1.0:
            looser = settings.tolerance * self.loosens / factor
            return replace(settings, tolerance=looser) if self.loosens else settings
        return replace(settings, tolerance=max(settings.tolerance / factor, self.best))


@pytest.fixture
def inexact(monkeypatch: pytest.MonkeyPatch) -> Inexact:
    """The tree replaced by an inexact sum; the test may set it."""
    made = Inexact()
    monkeypatch.setattr(summation, "settings_for", made.settings_for)
    monkeypatch.setattr(summation, "tightened", made.tightened)
    monkeypatch.setattr(summation, "tree_workspace", _workspace)
    monkeypatch.setattr(summation, "tree_sum", _sum)
    return made


def _workspace(
    n: int, threads: int, settings: TreeSettings, softened: bool = False, mixed: bool = False
) -> NDArray[np.float64]:
    return np.array([[settings.tolerance, SIZE]])


def _sum() -> PairSum:
    return CompiledFunction(inexact_field, SIGNATURE)


@inner_pair_kernel
def _potential(position, charge, softening2, constant, out_potential):  # type: ignore[no-untyped-def]
    for i in range(charge.size):
        total = 0.0
        for j in range(charge.size):
            if j != i:
                dx = position[0, i] - position[0, j]
                dy = position[1, i] - position[1, j]
                dz = position[2, i] - position[2, j]
                total += charge[j] / math.sqrt(dx * dx + dy * dy + dz * dz + softening2)
        out_potential[i] = constant * total


@pair_kernel
def inexact_field(position, charge, softening2, constant, work, out_field):  # type: ignore[no-untyped-def]
    n = charge.size
    e = 0.0
    for i in range(n):
        for axis in range(3):
            out_field[axis, i] = 0.0
            e += position[axis, i] ** 2
    e *= work[0, 0] / (n * work[0, 1] ** 2)
    for i in range(n):
        for j in range(i):
            dx = position[0, i] - position[0, j]
            dy = position[1, i] - position[1, j]
            dz = position[2, i] - position[2, j]
            r2 = dx * dx + dy * dy + dz * dz + softening2
            s = constant * (1.0 + (e if (i + j) % 2 == 0 else -e)) / (r2 * math.sqrt(r2))
            out_field[0, i] += s * charge[j] * dx
            out_field[1, i] += s * charge[j] * dy
            out_field[2, i] += s * charge[j] * dz
            out_field[0, j] -= s * charge[i] * dx
            out_field[1, j] -= s * charge[i] * dy
            out_field[2, j] -= s * charge[i] * dz
    if out_field.shape[0] == 4:
        _potential(position, charge, softening2, constant * (1.0 + 0.1 * work[0, 0]), out_field[3])
