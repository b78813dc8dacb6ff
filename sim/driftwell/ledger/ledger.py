"""The ledger: what is there now against what was there, came in, and went out.

    now = start + by fields, magnets and images + work of drives - taken by walls             (1)

for energy, momentum, angular momentum (about the origin), charge and count. The residual of each
is the difference of both sides of (1) over the largest amount that was ever in the account: a
relative error that cannot look small because a sum of signed terms happens to be.

The Coulomb forces enter (1) nowhere, so a force that broke the third law would show in momentum;
its direct check is the third-law residual |sum F| / sum |F|. Forces that act along the line between
two charges have no torque together either. Those of the tree do, as far as its expansions err: the
torque residual |sum r x F| / sum |r| |F| says how much, and the sum of |sum r x F| over the time
between records how far the account of angular momentum may be open for it.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from dataclasses import field as filled

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.potential import potentials
from driftwell.coulomb.summation import Summation
from driftwell.ledger.sums import (
    ANGULAR,
    ANGULAR_SIZE,
    CHARGE,
    CHARGE_SIZE,
    COULOMB_FORCE,
    COULOMB_SIZE,
    COULOMB_TORQUE,
    COULOMB_TORQUE_SIZE,
    COUNT,
    KINETIC,
    MOMENTUM,
    MOMENTUM_SIZE,
    SUMS,
    sum_charges,
)
from driftwell.stepping.accounts import (
    ANGULAR_CELL,
    ANGULAR_PROCESSES,
    ANGULAR_SOURCES,
    ANGULAR_WALLS,
    CHARGE_SOURCES,
    CHARGE_WALLS,
    COUNT_SOURCES,
    COUNT_WALLS,
    ENERGY_CELL,
    ENERGY_PROCESSES,
    ENERGY_SOURCES,
    ENERGY_WALLS,
    IMPULSE_FIELDS,
    IMPULSE_FRAMES,
    IMPULSE_IMAGES,
    IMPULSE_MAGNETS,
    MOMENTUM_PROCESSES,
    MOMENTUM_SOURCES,
    MOMENTUM_WALLS,
    TORQUE_FIELDS,
    TORQUE_FRAMES,
    TORQUE_IMAGES,
    TORQUE_MAGNETS,
    WORK_DRIVE,
    WORK_FRAMES,
    WORK_INDUCED,
)
from driftwell.stepping.frames import InFrame
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
    torque_residual: float
    angular_allowance: float
    coulomb_error: float
    image: float = 0.0
    impulse_images: Floats = filled(default_factory=lambda: np.zeros(3))
    torque_images: Floats = filled(default_factory=lambda: np.zeros(3))
    energy_sources: float = 0.0
    momentum_sources: Floats = filled(default_factory=lambda: np.zeros(3))
    angular_sources: Floats = filled(default_factory=lambda: np.zeros(3))
    charge_sources: float = 0.0
    count_born: float = 0.0
    energy_processes: float = 0.0
    momentum_processes: Floats = filled(default_factory=lambda: np.zeros(3))
    angular_processes: Floats = filled(default_factory=lambda: np.zeros(3))
    work_frames: float = 0.0
    impulse_frames: Floats = filled(default_factory=lambda: np.zeros(3))
    torque_frames: Floats = filled(default_factory=lambda: np.zeros(3))
    energy_cell: float = 0.0
    angular_cell: Floats = filled(default_factory=lambda: np.zeros(3))


@dataclass(frozen=True, slots=True)
class _Pairs:
    """What the charges' own forces come to: energy, J, residuals, and the torque of all, N m."""

    energy: float = 0.0
    third_law: float = 0.0
    torque_residual: float = 0.0
    torque: float = 0.0


@dataclass(frozen=True, slots=True)
class _Vectors:
    """Momentum and angular momentum that one account gave, (3,) each."""

    momentum: Floats
    angular: Floats


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
    _time: float = 0.0
    _torque: float = 0.0
    _untrue: float = 0.0
    _scale: _Scale = field(default_factory=_Scale)

    def close(
        self,
        time: float,
        plan: Plan,
        charges: Charges,
        work: Work,
        summation: Summation | None = None,
        coulomb_error: float = 0.0,
    ) -> LedgerRow:
        """The row at `time`; forces in `work` belong to the positions, accounts are settled.

        summation : what gives the energy of the pairs; None: every pair is summed
        coulomb_error : rms relative force error of the pair sum, as last measured
        """
        sums = np.empty(SUMS)
        sum_charges(
            charges.position,
            charges.velocity,
            charges.charge,
            charges.mass,
            charges.weight,
            work.pairs,
            plan.light2,
            np.empty(SUMS),
            sums,
        )
        kinetic, in_fields = float(sums[KINETIC]), float(work.energy[0])
        pairs = _pairs(plan, charges, work, sums, summation)
        coulomb = pairs.energy
        image = 0.5 * float(np.sum(charges.charge * work.image[3])) if plan.images else 0.0
        momentum, angular = sums[MOMENTUM : MOMENTUM + 3], sums[ANGULAR : ANGULAR + 3]
        charge, count = float(sums[CHARGE]), float(sums[COUNT])
        book = work.total + work.carry
        self._open(kinetic + in_fields + coulomb + image, momentum, angular, charge, count)
        self._scale.grow(
            kinetic + abs(in_fields) + abs(coulomb) + abs(image),
            float(sums[MOMENTUM_SIZE]),
            float(sums[ANGULAR_SIZE]),
            float(sums[CHARGE_SIZE]),
        )

        self._untrue += max(self._torque, pairs.torque) * (time - self._time)
        self._time, self._torque = time, pairs.torque

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
            + image
            - self._energy
            - book[WORK_DRIVE]
            - book[WORK_INDUCED]
            + book[ENERGY_WALLS]
            - book[ENERGY_SOURCES]
            - book[ENERGY_PROCESSES]
            - book[WORK_FRAMES]
            - book[ENERGY_CELL]
        )
        pulls, twists = vector(IMPULSE_IMAGES), vector(TORQUE_IMAGES)
        born = _Vectors(vector(MOMENTUM_SOURCES), vector(ANGULAR_SOURCES))
        acted = _Vectors(vector(MOMENTUM_PROCESSES), vector(ANGULAR_PROCESSES))
        frames = _Vectors(vector(IMPULSE_FRAMES), vector(TORQUE_FRAMES))
        cell = vector(ANGULAR_CELL)
        momentum_gap = momentum - self._momentum - impulses - magnets - pulls + walls
        momentum_gap -= born.momentum + acted.momentum + frames.momentum
        angular_gap = angular - self._angular - torques - turns - twists + spins_walls
        angular_gap -= born.angular + acted.angular + frames.angular + cell
        came, charge_came = float(book[COUNT_SOURCES]), float(book[CHARGE_SOURCES])
        lost = self._count + came - count
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
            charge_residual=_share(
                charge - self._charge - charge_came + book[CHARGE_WALLS], self._scale.charge
            ),
            count=count,
            count_lost=float(book[COUNT_WALLS]),
            count_residual=_share(lost - book[COUNT_WALLS], self._count + came),
            third_law_residual=pairs.third_law,
            torque_residual=pairs.torque_residual,
            angular_allowance=_share(self._untrue, self._scale.angular),
            coulomb_error=coulomb_error,
            image=image,
            impulse_images=pulls,
            torque_images=twists,
            energy_sources=float(book[ENERGY_SOURCES]),
            momentum_sources=born.momentum,
            angular_sources=born.angular,
            charge_sources=charge_came,
            count_born=came,
            energy_processes=float(book[ENERGY_PROCESSES]),
            momentum_processes=acted.momentum,
            angular_processes=acted.angular,
            work_frames=float(book[WORK_FRAMES]),
            impulse_frames=frames.momentum,
            torque_frames=frames.angular,
            energy_cell=float(book[ENERGY_CELL]),
            angular_cell=cell,
        )

    def state(self) -> dict[str, Floats]:
        """Everything a resume needs, by name."""
        return {
            "start": np.array(
                [self._energy, *self._momentum, *self._angular, self._charge, self._count]
            ),
            "torque": np.array([self._time, self._torque, self._untrue]),
            "scale": np.array([getattr(self._scale, each.name) for each in fields(_Scale)]),
        }

    @classmethod
    def taken_up(cls, state: Mapping[str, Floats]) -> Ledger:
        """The ledger whose :meth:`state` this is."""
        energy, px, py, pz, lx, ly, lz, charge, count = state["start"].tolist()
        time, torque, untrue = state["torque"].tolist()
        return cls(
            energy,
            np.array([px, py, pz]),
            np.array([lx, ly, lz]),
            charge,
            count,
            True,
            time,
            torque,
            untrue,
            _Scale(*state["scale"].tolist()),
        )

    def _open(
        self, energy: float, momentum: Floats, angular: Floats, charge: float, count: float
    ) -> None:
        if self._opened:
            return
        self._opened = True
        self._energy, self._charge, self._count = energy, charge, count
        self._momentum, self._angular = momentum.copy(), angular.copy()


def _pairs(
    plan: Plan, charges: Charges, work: Work, sums: Floats, summation: Summation | None
) -> _Pairs:
    """What the charges' own forces at hand come to."""
    if plan.coulomb == 0:
        return _Pairs()
    if plan.frames != 0 and summation is not None:
        return _in_frames(plan, charges, work, sums, summation)
    if plan.coulomb == 2 and summation is None:
        raise ValueError("in a cell the pairs' energy is known to their summation only")
    position, charge = charges.position, charges.charge
    potential = np.empty_like(charge)
    if summation is None:
        potentials(position, charge, plan.softening2, plan.constant, potential)
    else:
        summation.potential(position, charge, potential)
    force = float(np.linalg.norm(sums[COULOMB_FORCE : COULOMB_FORCE + 3]))
    twist = sums[COULOMB_TORQUE : COULOMB_TORQUE + 3]
    if plan.cell_axis >= 0:  # the torque across the axis is accounted
        twist = twist[plan.cell_axis]
    torque = float(np.linalg.norm(twist))
    return _Pairs(
        0.5 * float(np.sum(charge * potential)),
        _share(force, float(sums[COULOMB_SIZE])),
        _share(torque, float(sums[COULOMB_TORQUE_SIZE])),
        torque,
    )


def _in_frames(
    plan: Plan, charges: Charges, work: Work, sums: Floats, summation: Summation
) -> _Pairs:
    """The same of charges summed in their bunches' frames.

    Their torque in the laboratory is no error, and has its account; that in the frame would be one.
    """
    bunches = [InFrame(k, charges, work, plan.light2) for k in range(plan.frames)]
    return _Pairs(
        sum(each.energy(summation) for each in bunches),
        _share(
            float(np.linalg.norm(sums[COULOMB_FORCE : COULOMB_FORCE + 3])),
            float(sums[COULOMB_SIZE]),
        ),
        max(each.torque_residual() for each in bunches),
    )


def _share(amount: float, scale: float) -> float:
    return float(amount / scale) if scale > 0.0 else float(amount)
