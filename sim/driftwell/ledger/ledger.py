"""The ledger: what is there now against what was there, came in, and went out.

    now = start + by fields and magnets + work of drives - taken by walls                     (1)

for energy, momentum, angular momentum (about the origin), charge and count. The residual of each
is the difference of both sides of (1) over the largest amount that was ever in the account: a
relative error that cannot look small because a sum of signed terms happens to be.

The Coulomb forces enter (1) nowhere, so a force that broke the third law would show in momentum;
its direct check is the third-law residual |sum F| / sum |F|.
"""

from __future__ import annotations

from dataclasses import dataclass, field, fields

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.direct import THREADED, potentials, threaded_potentials
from driftwell.stepping.accounts import (
    ANGULAR_WALLS,
    CHARGE_WALLS,
    COUNT_WALLS,
    ENERGY_WALLS,
    IMPULSE_FIELDS,
    IMPULSE_MAGNETS,
    MOMENTUM_WALLS,
    TORQUE_FIELDS,
    TORQUE_MAGNETS,
    WORK_DRIVE,
    WORK_INDUCED,
)
from driftwell.stepping.motion import Charges, Plan, Work

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class LedgerRow:
    """The account at one time, SI; names and meaning as in the record's table ``ledger``."""

    time: float
    kinetic: float
    field: float
    coulomb: float
    work_drive: float
    work_induced: float
    energy_walls: float
    energy_residual: float
    momentum: Floats
    impulse_fields: Floats
    impulse_magnets: Floats
    momentum_walls: Floats
    momentum_residual: float
    angular_momentum: Floats
    torque_fields: Floats
    torque_magnets: Floats
    angular_walls: Floats
    angular_residual: float
    charge: float
    charge_walls: float
    charge_residual: float
    count: float
    count_lost: float
    count_residual: float
    third_law_residual: float


@dataclass(slots=True)
class _Scale:
    """The largest amounts seen in the accounts so far."""

    energy: float = 0.0
    momentum: float = 0.0
    angular: float = 0.0
    charge: float = 0.0

    def grow(self, energy: float, momentum: float, angular: float, charge: float) -> None:
        self.energy = max(self.energy, energy)
        self.momentum = max(self.momentum, momentum)
        self.angular = max(self.angular, angular)
        self.charge = max(self.charge, charge)


@dataclass(slots=True)
class Ledger:
    """Closes the account each time it is asked to; its first row is the start."""

    _energy: float = 0.0
    _momentum: Floats = field(default_factory=lambda: np.zeros(3))
    _angular: Floats = field(default_factory=lambda: np.zeros(3))
    _charge: float = 0.0
    _count: float = 0.0
    _opened: bool = False
    _scale: _Scale = field(default_factory=_Scale)

    def close(self, time: float, plan: Plan, charges: Charges, work: Work) -> LedgerRow:
        """The row at `time`; forces in `work` belong to the positions, accounts are settled."""
        mass, velocity, position = charges.mass, charges.velocity, charges.position
        gamma = np.sqrt(1.0 + _squares(velocity) / plan.light2)
        kinetic = float(np.sum(mass * _squares(velocity) / (1.0 + gamma)))
        in_fields = float(work.energy[0])
        coulomb, third_law = self._coulomb(plan, charges, work)
        momenta = mass * velocity
        spins = np.cross(position.T, momenta.T).T
        momentum, angular = momenta.sum(axis=1), spins.sum(axis=1)
        charge, count = float(charges.charge.sum()), float(charges.weight.sum())
        book = work.total + work.carry
        self._open(kinetic + in_fields + coulomb, momentum, angular, charge, count)
        self._scale.grow(
            kinetic + abs(in_fields) + abs(coulomb),
            float(np.sqrt(_squares(momenta)).sum()),
            float(np.sqrt(_squares(position) * _squares(momenta)).sum()),
            float(np.abs(charges.charge).sum()),
        )

        def vector(k: int) -> Floats:
            return book[k : k + 3].copy()

        impulses, magnets, walls = (
            vector(IMPULSE_FIELDS),
            vector(IMPULSE_MAGNETS),
            vector(MOMENTUM_WALLS),
        )
        torques, turns, spins_walls = (
            vector(TORQUE_FIELDS),
            vector(TORQUE_MAGNETS),
            vector(ANGULAR_WALLS),
        )
        energy_gap = (
            kinetic
            + in_fields
            + coulomb
            - self._energy
            - book[WORK_DRIVE]
            - book[WORK_INDUCED]
            + book[ENERGY_WALLS]
        )
        momentum_gap = momentum - self._momentum - impulses - magnets + walls
        angular_gap = angular - self._angular - torques - turns + spins_walls
        lost = self._count - count
        return LedgerRow(
            time=time,
            kinetic=kinetic,
            field=in_fields,
            coulomb=coulomb,
            work_drive=float(book[WORK_DRIVE]),
            work_induced=float(book[WORK_INDUCED]),
            energy_walls=float(book[ENERGY_WALLS]),
            energy_residual=_share(energy_gap, self._scale.energy),
            momentum=momentum,
            impulse_fields=impulses,
            impulse_magnets=magnets,
            momentum_walls=walls,
            momentum_residual=_share(float(np.linalg.norm(momentum_gap)), self._scale.momentum),
            angular_momentum=angular,
            torque_fields=torques,
            torque_magnets=turns,
            angular_walls=spins_walls,
            angular_residual=_share(float(np.linalg.norm(angular_gap)), self._scale.angular),
            charge=charge,
            charge_walls=float(book[CHARGE_WALLS]),
            charge_residual=_share(charge - self._charge + book[CHARGE_WALLS], self._scale.charge),
            count=count,
            count_lost=float(book[COUNT_WALLS]),
            count_residual=_share(lost - book[COUNT_WALLS], self._count),
            third_law_residual=third_law,
        )

    def state(self) -> dict[str, Floats]:
        """Everything a resume needs, by name."""
        return {
            "start": np.array(
                [self._energy, *self._momentum, *self._angular, self._charge, self._count]
            ),
            "scale": np.array([getattr(self._scale, each.name) for each in fields(_Scale)]),
        }

    def _open(
        self, energy: float, momentum: Floats, angular: Floats, charge: float, count: float
    ) -> None:
        if self._opened:
            return
        self._opened = True
        self._energy, self._charge, self._count = energy, charge, count
        self._momentum, self._angular = momentum.copy(), angular.copy()

    @staticmethod
    def _coulomb(plan: Plan, charges: Charges, work: Work) -> tuple[float, float]:
        """Energy of all pairs, J, and |sum F| / sum |F| of the forces at hand."""
        if plan.coulomb == 0:
            return 0.0, 0.0
        potential = np.empty_like(charges.charge)
        summed = threaded_potentials if potential.size >= THREADED else potentials
        summed(charges.position, charges.charge, plan.softening2, plan.constant, potential)
        force = charges.charge * work.coulomb
        scale = float(np.sqrt(_squares(force)).sum())
        return (
            0.5 * float(np.sum(charges.charge * potential)),
            _share(float(np.linalg.norm(force.sum(axis=1))), scale),
        )


def _squares(vectors: Floats) -> Floats:
    """Squared lengths of vectors (3, n)."""
    x, y, z = vectors
    result: Floats = x * x + y * y + z * z
    return result


def _share(amount: float, scale: float) -> float:
    return float(amount / scale) if scale > 0.0 else float(amount)
