"""Charges born while the run goes on, at their true time inside a step.

Until it is born a charge is WAITING at its birth place, with charge and velocity 0: it acts on
nothing, and the field there is known. In the step from t to t' in which it is born at t_b it is
placed, after the last drift, where it flew in the field E that was last found there:

    tau = t' - t_b,    a = Q/m E
    u_1 = u_b + a tau/2,  x = x_b + mean(u_1/gamma) tau,  u = u_1 turned + a tau/2          (1)

straight, or on the helix in the magnetic field; exact in uniform fields. The step's closing kick of
length k comes with the field at x, so the velocity set is u - a k. Then it joins all sums, and from
this kick on every other charge feels it: the third law holds exactly, and a charge that is born
somewhere in a step acts for half of it. Where the charges' own field E_c is taken every m-th step
only, with the next of its kicks, of length k_c, a time s ahead, that kick's share is set apart:

    x + a_c s (2 k_c - s)/2,    u - a k - a_c (k_c - s)                                     (2)

to be right when it is made. What the ledger enters is what the charge brings: mass times the
velocity set, and the energy

    K(u) + Q phi(x) + (k_c - s) P,    P = sum_j Q_j v_j . E(x_j)                            (3)

where E is the newborn's own field (and that of its images): others take up P for the time they feel
it in the closing kick, as if they had met it that much earlier. The energy closes to second order.

A source limited by space charge launches each charge that is due with the probability

    p = min(1, eps0 E_n A / (I h))                                                          (4)

with E_n the field at its birth place along the surface's normal, taken as it pulls the charge away,
A the area that emits, I the current supplied then. By Gauss's law so much charge makes the field
vanish; where the field pushes back nothing is launched. But charges softened within a length e draw
on the surface, at the height z above it, only the part z/(z^2 + e^2)^(1/2) of the field lines that
they should: of what stands nearer than e emission would learn late. So they count there as if at
the height (z^2 + e^2)^(1/2), unsoftened, with their images: E_n is less by

    sum_j 2 Q_j/(4 pi eps0) ((z_j^2 + e^2)^(1/2) - z_j)/(r_j^2 + e^2)^(3/2)                 (5)

which makes up for it exactly before a plane. It serves the decision alone, and moves nothing.

References
----------
C. K. Birdsall and W. B. Bridges, Electron Dynamics of Diode Regions (1966), on emission until the
field at the cathode vanishes; C. K. Birdsall and A. B. Langdon, Plasma Physics via Computer
Simulation (1985), on births at any time of a step (both from memory). Launching by chance with (4)
is our own way to do it.
"""

from __future__ import annotations

import math
from typing import Any, NamedTuple

import numba
import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.direct import PairSum
from driftwell.fields.table import FieldTable
from driftwell.kernels import inner_kernel, inner_pair_kernel, kernel, outer_kernel
from driftwell.kernels.pointers import CompiledFunction
from driftwell.kernels.sums import add_compensated
from driftwell.stepping.accounts import (
    ANGULAR_SOURCES,
    CHARGE_SOURCES,
    COUNT_SOURCES,
    ENERGY_SOURCES,
    MOMENTUM_SOURCES,
    enter_vector,
)
from driftwell.stepping.drift import helix
from driftwell.stepping.forces import external_forces, magnetic_at, magnetised
from driftwell.stepping.motion import (
    CURSOR_BIRTH,
    CURSOR_NEWBORN,
    NEWBORN,
    Charges,
    Fields,
    Plan,
    Work,
)
from driftwell.walls.table import SurfaceTable, level

DUE, BORN, REFUSED = 0, 1, 2
"""What has become of a birth."""
MANY_BORN = 1000
"""From this many charges born in one step on, a sum of the tree beats a direct one for each."""


class Births(NamedTuple):
    """The births laid out, in the order of time.

    time : (k,) float64, s; place : (k,) int64, where the charge stands in the arrays
    velocity : (3, k) float64, proper velocity at birth, m/s
    charge, weight : (k,) float64, C and real particles, of the macro-charge
    ratio : (k,) float64, charge to mass, C/kg
    normal : (3, k) float64, of the surface left, outward
    demand : (k,) float64, eps0 A / I of a limited source, m s/V; 0 where nothing limits it
    chance : (k,) float64 in [0, 1), which decides in (4)
    fate : (k,) int8, DUE, BORN or REFUSED, changed
    horizon : (1,) float64, s, when the first charge is due that is not among these
    """

    time: NDArray[np.float64]
    place: NDArray[np.int64]
    velocity: NDArray[np.float64]
    charge: NDArray[np.float64]
    weight: NDArray[np.float64]
    ratio: NDArray[np.float64]
    normal: NDArray[np.float64]
    demand: NDArray[np.float64]
    chance: NDArray[np.float64]
    fate: NDArray[np.int8]
    horizon: NDArray[np.float64]


def bearing_of(
    plan: Plan, fields: Fields, surfaces: SurfaceTable, charges: Charges, births: Births, work: Work
) -> CompiledFunction:
    """What bears charges, as a pointer; where there are no births, a thing of that kind."""
    types: Any = numba.types
    typeof: Any = numba.typeof
    taken = [typeof(each) for each in (plan, *fields, surfaces, charges, births, work)]
    some = births.time.size > 0 or np.isfinite(births.horizon[0])
    return CompiledFunction(
        _bear if some else _no_bearing, types.void(*taken, *[types.float64] * 5)
    )


@inner_kernel
def take_births(
    bearing: CompiledFunction,
    pair_sum: PairSum,
    images: CompiledFunction,
    plan: Plan,
    fields: Fields,
    surfaces: SurfaceTable,
    charges: Charges,
    births: Births,
    end: float,
    inside: float,
    h: float,
    kick: float,
    ahead: float,
    work: Work,
) -> None:
    """Bear the charges due before `end`, after the step's last drift.

    kick : s, length of the step's closing kick
    ahead : s, from `end` to the next kick by the charges' own field
    """
    c = work.cursor[CURSOR_BIRTH]
    if c < births.time.size and births.time[c] < end:
        bearing(
            plan,
            fields.electric,
            fields.uniform,
            fields.magnetic,
            surfaces,
            charges,
            births,
            work,
            end,
            inside,
            h,
            kick,
            ahead,
        )
        _enter_shared(pair_sum, images, plan, charges, h, kick, ahead, work)


@inner_kernel
def close_births(charges: Charges, births: Births, work: Work) -> None:
    """Make the newborn like all others, at the end of the step."""
    cursor = work.cursor
    for c in range(cursor[CURSOR_BIRTH] - cursor[CURSOR_NEWBORN], cursor[CURSOR_BIRTH]):
        i = births.place[c]
        if charges.alive[i] == NEWBORN:
            charges.alive[i] = 1
            if work.clearance.size > 0:
                work.clearance[i] = 0.0
    cursor[CURSOR_NEWBORN] = 0


@inner_kernel
def _own_kick(plan: Plan, h: float, kick: float) -> float:
    """Length of the closing kick by the charges' own field, s."""
    return kick if plan.coulomb_every == 1 else 0.5 * plan.coulomb_every * h


@kernel
def _no_bearing(
    plan: Plan,
    electric: FieldTable,
    uniform: FieldTable,
    magnetic: FieldTable,
    surfaces: SurfaceTable,
    charges: Charges,
    births: Births,
    work: Work,
    end: float,
    inside: float,
    h: float,
    kick: float,
    ahead: float,
) -> None:
    """Nothing is ever born."""


@kernel
def _bear(
    plan: Plan,
    electric: FieldTable,
    uniform: FieldTable,
    magnetic: FieldTable,
    surfaces: SurfaceTable,
    charges: Charges,
    births: Births,
    work: Work,
    end: float,
    inside: float,
    h: float,
    kick: float,
    ahead: float,
) -> None:
    """Launch what is due, equations (1) to (4), and enter what each brings.

    Of their energy in the charges' own field, what :func:`_enter_shared` enters is left out.
    """
    fields = Fields(electric, uniform, magnetic)
    first = work.cursor[CURSOR_BIRTH]
    last = first
    while last < births.time.size and births.time[last] < end:
        last += 1
    apart = _shared(plan, charges, work, last - first)
    own = _own_kick(plan, h, kick)
    for c in range(first, last):
        i = births.place[c]
        ex, ey, ez = work.external[0, i], work.external[1, i], work.external[2, i]
        cx = cy = cz = 0.0
        if plan.coulomb != 0 or plan.images != 0:
            cx, cy, cz = work.coulomb[0, i], work.coulomb[1, i], work.coulomb[2, i]
        ratio = births.ratio[c]
        if births.demand[c] > 0.0:
            pull = births.normal[0, c] * (ex + cx) + births.normal[1, c] * (ey + cy)
            pull += births.normal[2, c] * (ez + cz)
            pull -= _missing(births, c, i, plan, charges)
            pull = pull if ratio > 0.0 else -pull
            if births.chance[c] * h >= births.demand[c] * pull:  # (4)
                charges.alive[i] = 0
                births.fate[c] = REFUSED
                continue
        births.fate[c] = BORN
        charges.alive[i] = NEWBORN
        x, y, z = charges.position[0, i], charges.position[1, i], charges.position[2, i]
        for s in range(surfaces.kind.size):
            if level(surfaces.kind[s], surfaces.parameter[s], x, y, z) == 0.0:
                work.side[s, i] = 0
        tau = end - births.time[c]
        gx, gy, gz = ratio * cx, ratio * cy, ratio * cz
        ax, ay, az = ratio * ex + gx, ratio * ey + gy, ratio * ez + gz
        ux = births.velocity[0, c] + 0.5 * tau * ax
        uy = births.velocity[1, c] + 0.5 * tau * ay
        uz = births.velocity[2, c] + 0.5 * tau * az
        way = tau / math.sqrt(1.0 + (ux * ux + uy * uy + uz * uz) / plan.light2)
        mx, my, mz = ux, uy, uz
        if magnetised(fields):
            t = births.time[c] + 0.5 * tau
            bx, by, bz = magnetic_at(fields, charges, i, t, inside, work)
            strength = math.sqrt(bx * bx + by * by + bz * bz)
            if strength > 0.0:
                theta = ratio * strength * way
                mx, my, mz, wx, wy, wz = helix(
                    ux, uy, uz, bx / strength, by / strength, bz / strength, theta
                )
                ux, uy, uz = ux + wx, uy + wy, uz + wz
        shift = 0.5 * ahead * (2.0 * own - ahead)  # (2)
        x += way * mx + shift * gx
        y += way * my + shift * gy
        z += way * mz + shift * gz
        ux, uy, uz = ux + 0.5 * tau * ax, uy + 0.5 * tau * ay, uz + 0.5 * tau * az
        u2 = ux * ux + uy * uy + uz * uz
        gamma = math.sqrt(1.0 + u2 / plan.light2)
        work.slowness[i] = 1.0 / gamma
        charges.position[0, i], charges.position[1, i], charges.position[2, i] = x, y, z
        m, q = charges.mass[i], births.charge[c]
        energy = m * u2 / (1.0 + gamma)
        charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = ux, uy, uz
        if plan.coulomb != 0 and not apart:
            energy += q * _energy_among(i, plan, charges, work, own - ahead)
        ux -= kick * ratio * ex + (own - ahead) * gx
        uy -= kick * ratio * ey + (own - ahead) * gy
        uz -= kick * ratio * ez + (own - ahead) * gz
        charges.velocity[0, i], charges.velocity[1, i], charges.velocity[2, i] = ux, uy, uz
        charges.charge[i], charges.weight[i] = q, births.weight[c]
        for axis in range(3):
            charges.charge_to_mass[axis, i] = ratio
        _, level_outside, _ = external_forces(fields, charges, end, inside, False, work, i, i + 1)
        total, carry = work.total, work.carry
        add_compensated(total, carry, ENERGY_SOURCES, energy + level_outside)
        px, py, pz = m * ux, m * uy, m * uz
        enter_vector(MOMENTUM_SOURCES, px, py, pz, total, carry)
        enter_vector(
            ANGULAR_SOURCES, y * pz - z * py, z * px - x * pz, x * py - y * px, total, carry
        )
        add_compensated(total, carry, CHARGE_SOURCES, q)
        add_compensated(total, carry, COUNT_SOURCES, births.weight[c])
    work.cursor[CURSOR_BIRTH] = last
    work.cursor[CURSOR_NEWBORN] = last - first


@inner_pair_kernel
def _missing(births: Births, c: int, i: int, plan: Plan, charges: Charges) -> float:
    """What softened charges lack of field at the surface that birth `c` leaves, eq. (5), V/m.

    Those above the surface's plane count, but not the newborn of the same step.
    """
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    xi, yi, zi = x[i], y[i], z[i]
    nx, ny, nz = births.normal[0, c], births.normal[1, c], births.normal[2, c]
    total = 0.0
    for j in range(x.size):
        dx, dy, dz = x[j] - xi, y[j] - yi, z[j] - zi
        height = dx * nx + dy * ny + dz * nz
        counts = 1.0 if charges.alive[j] == 1 and height >= 0.0 else 0.0
        r2 = dx * dx + dy * dy + dz * dz + plan.softening2
        lifted = math.sqrt(height * height + plan.softening2)
        r2 = r2 if r2 != 0.0 else math.inf
        total += counts * charges.charge[j] * (lifted - height) / (r2 * math.sqrt(r2))
    return 2.0 * plan.constant * total


@inner_pair_kernel
def _energy_among(i: int, plan: Plan, charges: Charges, work: Work, taken: float) -> float:
    """Energy per charge of a newborn among all charged by now, V, with its P of (3).

    taken : s, k_c - s of (3). Among two newborn both take up P; the later one enters it.
    """
    x, y, z = charges.position[0], charges.position[1], charges.position[2]
    ux, uy, uz = charges.velocity[0], charges.velocity[1], charges.velocity[2]
    xi, yi, zi = x[i], y[i], z[i]
    s = work.slowness[i]
    vx, vy, vz = s * ux[i], s * uy[i], s * uz[i]
    total = 0.0
    for j in range(x.size):
        both = 1.0 if charges.alive[j] == NEWBORN else 0.0
        dx, dy, dz = x[j] - xi, y[j] - yi, z[j] - zi
        slow = work.slowness[j]
        along = dx * (slow * ux[j] - both * vx)
        along += dy * (slow * uy[j] - both * vy)
        along += dz * (slow * uz[j] - both * vz)
        r2 = dx * dx + dy * dy + dz * dz + plan.softening2
        r2 = r2 if r2 != 0.0 else math.inf
        total += charges.charge[j] / math.sqrt(r2) * (1.0 + taken * along / r2)
    return plan.constant * total


@inner_kernel
def _shared(plan: Plan, charges: Charges, work: Work, count: int) -> bool:
    """Whether the pairs of so many newborn are summed at once, by the tree."""
    there = work.levels.shape[1] == charges.charge.size and charges.charge.size > 0
    return plan.coulomb != 0 and there and count >= MANY_BORN


@outer_kernel
def _enter_shared(
    pair_sum: PairSum,
    images: CompiledFunction,
    plan: Plan,
    charges: Charges,
    h: float,
    kick: float,
    ahead: float,
    work: Work,
) -> None:
    """Enter what the newborn bring of energy in their images, and of pairs where they are many.

    Overwrites ``work.image`` and ``work.levels``, which are found anew before the next kick.
    """
    apart = _shared(plan, charges, work, work.cursor[CURSOR_NEWBORN])
    if not apart and plan.images == 0:
        return
    own = work.spare[0]
    for i in range(own.size):
        own[i] = charges.charge[i] if charges.alive[i] == NEWBORN else 0.0
    taken = _own_kick(plan, h, kick) - ahead
    if apart:
        pair_sum(charges.position, own, plan.softening2, plan.constant, work.tiles, work.levels)
        _enter_levels(charges, own, work.levels, taken, work)
    if plan.images != 0:
        images(charges.position, own, plan.constant, work.image_table, work.image_work, work.image)
        _enter_levels(charges, own, work.image, taken, work)


@outer_kernel
def _enter_levels(
    charges: Charges, own: np.ndarray, levels: np.ndarray, taken: float, work: Work
) -> None:
    """Enter the energy of the newborn in what they make, `levels` (4, n), with P of (3)."""
    energy = 0.0
    for i in range(own.size):
        energy += (charges.charge[i] - 0.5 * own[i]) * levels[3, i]
        along = levels[0, i] * charges.velocity[0, i] + levels[1, i] * charges.velocity[1, i]
        along += levels[2, i] * charges.velocity[2, i]
        energy += taken * charges.charge[i] * work.slowness[i] * along
    add_compensated(work.total, work.carry, ENERGY_SOURCES, energy)
