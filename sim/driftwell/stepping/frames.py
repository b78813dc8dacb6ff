"""Bunches that are summed in their own rest frames: their forces in the loop, and their accounts.

The frames are renewed after every drift, for the time at which the half kick that ends there is
done. The charges' own force does not change a bunch's mean velocity, so that is known ahead, and
steps stay symmetric in time. Forces that are taken anew between two drifts, where a charge is lost,
where a run is taken up again, leave the frames as they are: so they are the same to the last bit.

What the forces do besides following their energy W (coulomb/frame_sum.py) is entered:

- the change of W by that of U at fixed places, by the trapezoidal rule from sum to sum, symmetric
  in time as the steps are;
- the torque of stretched forces, which do not act along the line between two charges;
- force, torque and work of what bunches do to each other, which have no energy in common.
"""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.direct import PairSum
from driftwell.coulomb.frame_sum import stretch
from driftwell.coulomb.frame_table import LORENTZ, OTHERS, PLACE, PROPER, PUSH, TWIST, WORK
from driftwell.coulomb.summation import Summation
from driftwell.coulomb.unresolved import unresolved_pair
from driftwell.kernels import kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import IMPULSE_FRAMES, TORQUE_FRAMES, WORK_FRAMES
from driftwell.stepping.motion import Charges, Plan, Work

Floats = NDArray[np.float64]


@kernel
def take_frames(
    pair_sum: PairSum,
    frame_sum: CompiledFunction,
    ahead: float,
    plan: Plan,
    charges: Charges,
    work: Work,
) -> None:
    """The charges' forces in their bunches' frames, as fields; and the work of changing frames.

    Overwrites ``work.pairs`` and ``work.coulomb``.
    """
    n = charges.charge.size
    frame_sum(
        pair_sum,
        charges.position,
        charges.velocity,
        charges.charge,
        charges.mass,
        charges.cloud,
        work.external,
        plan.softening2,
        plan.constant,
        plan.light2,
        ahead,
        work.bunch,
        work.levels.shape[1] == n,
        work.tiles,
        work.frames,
        work.frame_rows,
        work.pairs,
        work.coulomb,
    )
    add_compensated(work.total, work.carry, WORK_FRAMES, work.frames[plan.frames, WORK])


@outer_kernel
def enter_frames(plan: Plan, charges: Charges, together: bool, h: float, work: Work) -> None:
    """Account what the charges' own forces will give in the kick of length `h` about to be made.

    together : whether the fields push in the same kick

    A kick changes the kinetic energy by Q E.(u0 + u1)/(gamma0 + gamma1) h exactly; the part of
    other bunches in E is entered.
    """
    every = work.frames[plan.frames]
    for k in range(3):
        add_compensated(work.total, work.carry, TORQUE_FRAMES + k, h * every[TWIST + k])
    if plan.frames == 1:
        return
    for k in range(3):
        add_compensated(work.total, work.carry, IMPULSE_FRAMES + k, h * every[PUSH + k])
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    pushed, fields, others = work.coulomb, work.external, work.frame_rows[OTHERS : OTHERS + 3]
    share = 1.0 if together else 0.0
    total = 0.0
    for i in range(ux.size):
        s = h * charges.charge_to_mass[0, i]
        wx = ux[i] + s * (share * fields[0, i] + pushed[0, i])
        wy = uy[i] + s * (share * fields[1, i] + pushed[1, i])
        wz = uz[i] + s * (share * fields[2, i] + pushed[2, i])
        gamma0 = math.sqrt(1.0 + (ux[i] ** 2 + uy[i] ** 2 + uz[i] ** 2) / plan.light2)
        gamma1 = math.sqrt(1.0 + (wx * wx + wy * wy + wz * wz) / plan.light2)
        along = (
            others[0, i] * (ux[i] + wx) + others[1, i] * (uy[i] + wy) + others[2, i] * (uz[i] + wz)
        )
        total += charges.charge[i] * along / (gamma0 + gamma1)
    add_compensated(work.total, work.carry, WORK_FRAMES, h * total)


@outer_kernel
def energy_in_frame(i: int, plan: Plan, charges: Charges, work: Work) -> float:
    """The part of W that charge `i` has in common with all others of its bunch, J."""
    own = work.bunch[charges.cloud[i]]
    row = work.frames[own]
    ux, uy, uz = row[PROPER], row[PROPER + 1], row[PROPER + 2]
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    total = 0.0
    for j in range(x.size):
        if j == i or work.bunch[charges.cloud[j]] != own:
            continue
        dx, dy, dz = x[i] - x[j], y[i] - y[j], z[i] - z[j]
        along = dx * ux + dy * uy + dz * uz
        r2 = dx * dx + dy * dy + dz * dz + along * along / plan.light2 + plan.softening2
        if r2 > 0.0:
            total += charges.charge[j] / math.sqrt(r2)
    return plan.constant * charges.charge[i] * total / row[LORENTZ]


@outer_kernel
def falling_in_frame(plan: Plan, charges: Charges, limit: float, work: Work) -> int:
    """As ``unresolved_pair`` for charges of one bunch, whose time in its frame is dilated.

    limit : the largest rate allowed in the laboratory, squared, 1/s^2
    """
    row = work.frames[0]
    stretched = work.frame_rows[PLACE : PLACE + 3]
    stretch(charges.position, row, plan.light2, stretched)
    return unresolved_pair(
        stretched,
        charges.charge,
        charges.mass,
        plan.constant,
        limit * row[LORENTZ] ** 2,
        row[LORENTZ] * math.sqrt(plan.extent2),
        work.search,
    )


class InFrame:
    """The charges of one bunch as they are in its frame, seen from Python.

    Attributes
    ----------
    lorentz : Gamma of the frame
    place : (3, n) m, stretched; charge : (n,) C, 0 for charges of other bunches
    field : (3, n) V/m in the frame, of the bunch's charges at each other; of no meaning at others
    """

    def __init__(self, number: int, charges: Charges, work: Work, light2: float) -> None:
        """Bunch `number`; the forces in `work` belong to the places."""
        row = work.frames[number]
        u = row[PROPER : PROPER + 3].copy()
        self.lorentz = float(row[LORENTZ])
        forward = 1.0 / ((1.0 + self.lorentz) * light2)
        x, pushed = charges.position, work.pairs
        self.place = x + forward * np.outer(u, u @ x)
        self.charge = np.where(work.bunch[charges.cloud] == number, charges.charge, 0.0)
        # the inverse of eq. (3): what lies across is weaker by Gamma, what lies along is not
        self.field = self.lorentz * pushed - forward * np.outer(u, u @ pushed)

    def energy(self, summation: Summation) -> float:
        """W of the bunch, J."""
        potential = np.empty_like(self.charge)
        summation.potential(self.place, self.charge, potential)
        return 0.5 * float(np.sum(self.charge * potential)) / self.lorentz

    def torque_residual(self) -> float:
        """|sum x' x QE'| / sum |x'||QE'| about the mean place: 0 for forces between two charges."""
        there = self.charge != 0.0
        x = self.place[:, there]
        x = x - x.mean(axis=1, keepdims=True) if x.size else x
        force = self.charge[there] * self.field[:, there]
        sizes = np.linalg.norm(x, axis=0) * np.linalg.norm(force, axis=0)
        scale = float(sizes.sum())
        twist = float(np.linalg.norm(np.cross(x.T, force.T).sum(axis=0)))
        return twist / scale if scale > 0.0 else twist
