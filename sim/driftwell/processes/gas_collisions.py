"""Collisions with the atoms of a gas: hard spheres, or capture by the induced dipole.

A gas of atoms of mass M and density n = p / (k T) has Maxwell's velocities about its flow w. An ion
of mass m and velocity v meets atoms of velocity w + a at the rate n sigma(g) g, g = |v - w - a|:

    hard spheres      sigma constant                                                        (1)
    induced dipole    sigma g = k_L = q / (2 eps0) (alpha / mu)^(1/2),  alpha = 4 pi eps0 alpha_V,
                      mu = m M / (m + M): the same for every g                              (2)

and leaves with g turned to any direction with equal probability: v' = V + M/(m + M) g n, where V is
the velocity of the centre of mass. A share of the collisions may exchange the charge (the ion goes
on with the atom's velocity, that of an ion made at rest in it), or end with the ion neutralised.

Atoms are drawn so that no error remains. In (2) they have Maxwell's distribution, and every event
is a collision. In (1) g <= c + |a| with any c >= |v - w|, so events come at the rate
n sigma (c + <|a|>), <|a|> = (8 k T / pi M)^(1/2), with an atom from (c + |a|) times Maxwell's
distribution: Maxwell's itself with the probability c / (c + <|a|>), else speeds of density
a^3 exp(-M a^2 / 2kT). It is a collision with the probability g / (c + |a|) <= 1, else nothing.

Velocities are those of mechanics at low speed: proper velocities are taken for velocities.

References
----------
P. Langevin, Ann. Chim. Phys. 5 (1905) 245; G. Gioumousis and D. P. Stevenson, J. Chem. Phys. 29
(1958) 294: (2). H. R. Skullerud, J. Phys. D 1 (1968) 1567 (null collisions). R. R. Coveyou,
R. R. Bate and R. K. Osborn, J. Nucl. Energy 2 (1956) 153 (the atom's distribution). All from
memory.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Annotated, Literal, Self

import numpy as np

from driftwell.constants import ATOMIC_MASS, BOLTZMANN, COULOMB_CONSTANT, ELECTRIC_CONSTANT
from driftwell.forms import (
    Area,
    Bound,
    Form,
    Mass,
    Positive,
    Pressure,
    Real,
    Temperature,
    Velocity,
    Volume,
    checked,
    key,
    one_of,
    refuse,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.forms.faults import Fault
from driftwell.kernels import inner_kernel
from driftwell.kernels.circle import direction
from driftwell.kernels.philox import exponential, four_normals, uniforms
from driftwell.processes.form import FLOW, OWN, PackedProcess, ProcessForm
from driftwell.processes.outcome import CHANGED, COLLISION, LOST, NOTHING, Event

HARD_SPHERE, INDUCED_DIPOLE = 1, 2
_SHARE, _THERMAL, _MEAN, _EXCHANGE, _LOSS = OWN, OWN + 1, OWN + 2, OWN + 3, OWN + 4
_SAME_MASS = 0.01

Share = Annotated[Real, Bound(least=0.0, most=1.0)]


class HardSphere(Form):
    """Elastic spheres: a cross-section that does not depend on the speed."""

    kind: Literal["hard-sphere"]
    cross_section: Positive[Area] = key("cross-section", example="1e-18 m^2")


class InducedDipole(Form):
    """Capture by the dipole that the ion induces in the atom: a rate that is the same for all."""

    kind: Literal["induced-dipole"]
    polarisability: Positive[Volume] = key(
        "polarisability volume of the atom", example="0.205 angstrom^3"
    )


if TYPE_CHECKING:
    Model = HardSphere | InducedDipole
else:
    Model = one_of((HardSphere, InducedDipole))


class GasCollisions(ProcessForm):
    """Collisions with the atoms of a gas, one by one."""

    kind: Literal["gas-collisions"]
    mass: Positive[Mass] = key("mass of an atom or molecule of the gas", example="4.0026 u")
    pressure: Positive[Pressure] = key("pressure", example="1e-3 mbar")
    temperature: Positive[Temperature] = key("temperature", default=300.0)
    collision: Model = key("how ion and atom meet")
    flow: tuple[Velocity, Velocity, Velocity] = key(
        "mean velocity of the gas", default=(0.0, 0.0, 0.0)
    )
    exchange: Share = key(
        "share of the collisions in which the charge goes over to the atom, which must be of the "
        "ion's own kind",
        default=0.0,
    )
    loss: Share = key(
        "share of the collisions in which the ion is neutralised, and lost", default=0.0
    )

    @checked
    def _whole(self) -> Self:
        if self.exchange + self.loss > 1.0:
            raise refuse("`exchange` and `loss` together must be at most 1")
        return self

    def density(self) -> float:
        """Atoms in a volume, 1/m^3."""
        return self.pressure / (BOLTZMANN * self.temperature)

    def capture_rate(self, body: Body, polarisability: float) -> float:
        """k_L of equation (2), m^3/s."""
        reduced = body.mass * self.mass / (body.mass + self.mass)
        alpha = polarisability / COULOMB_CONSTANT  # C^2 m^2 / J
        return abs(body.charge) / (2.0 * ELECTRIC_CONSTANT) * math.sqrt(alpha / reduced)

    def packed(self, body: Body) -> PackedProcess:
        thermal = math.sqrt(BOLTZMANN * self.temperature / self.mass)
        mean = thermal * math.sqrt(8.0 / math.pi)
        share = self.mass / (body.mass + self.mass)
        own = (share, thermal, mean, self.exchange, self.loss)
        if isinstance(self.collision, HardSphere):
            per_length = self.density() * self.collision.cross_section
            return PackedProcess(HARD_SPHERE, own, per_length * mean, per_length, self.flow)
        rate = self.density() * self.capture_rate(body, self.collision.polarisability)
        return PackedProcess(INDUCED_DIPOLE, own, rate, 0.0, self.flow)

    def faults(self, bodies: tuple[Body, ...]) -> list[Fault]:
        if self.exchange == 0.0:
            return []
        return [
            Fault(
                ("exchange",),
                f"{self.exchange:g}",
                f"needs a gas of the ions' own mass, {body.mass / ATOMIC_MASS:.6g} u for "
                f'"{body.name}", within 1 %; the gas has {self.mass / ATOMIC_MASS:.6g} u',
            )
            for body in bodies
            if abs(self.mass / body.mass - 1.0) > _SAME_MASS
        ]

    def takes_charges(self) -> bool:
        return self.loss > 0.0

    def words(self) -> str:
        model = self.collision
        how = (
            f"hard spheres of {spelled(model.cross_section, 'm^2')}"
            if isinstance(model, HardSphere)
            else f"induced dipoles of {model.polarisability * 1e30:.6g} angstrom^3"
        )
        parts = [
            f"gas of {self.mass / ATOMIC_MASS:.6g} u at {spelled(self.pressure, 'Pa')} and "
            f"{spelled(self.temperature, 'K')}, {how}"
        ]
        if any(self.flow):
            parts.append(f"flowing at ({', '.join(f'{each:.6g}' for each in self.flow)}) m/s")
        if self.exchange:
            parts.append(f"{self.exchange:.6g} of collisions exchange the charge")
        if self.loss:
            parts.append(f"{self.loss:.6g} of collisions neutralise the ion")
        return ", ".join(parts)


@inner_kernel
def collide(
    kind: int,
    p: np.ndarray,
    key: np.ndarray,
    who: int,
    event: int,
    bound: float,
    vx: float,
    vy: float,
    vz: float,
) -> Event:
    """Event number `event` of charge `who`, of velocity v; `bound` : c, m/s, as its rate had it.

    Returns what came of it, the change of velocity (3), m/s, and the exponential to the next event.
    """
    clock, u1, u2, u3 = uniforms(key, who, event, COLLISION, 0)
    a1, a2, a3, a4 = uniforms(key, who, event, COLLISION, 1)
    wait = exponential(clock)
    vx, vy, vz = vx - p[FLOW], vy - p[FLOW + 1], vz - p[FLOW + 2]
    thermal = p[_THERMAL]
    if kind == HARD_SPHERE and u1 * (bound + p[_MEAN]) >= bound:
        speed = thermal * math.sqrt(-2.0 * (math.log(a1) + math.log(a2)))
        ax, ay, az = direction(a3, a4)
        ax, ay, az = speed * ax, speed * ay, speed * az
    else:
        ax, ay, az, _ = four_normals(a1, a2, a3, a4)
        ax, ay, az = thermal * ax, thermal * ay, thermal * az
    gx, gy, gz = vx - ax, vy - ay, vz - az
    g = math.sqrt(gx * gx + gy * gy + gz * gz)
    if kind == HARD_SPHERE:
        if u2 * (bound + math.sqrt(ax * ax + ay * ay + az * az)) >= g:
            return NOTHING, 0.0, 0.0, 0.0, wait
        u1, u2, _, _ = uniforms(key, who, event, COLLISION, 2)
    if u3 < p[_LOSS]:
        return LOST, 0.0, 0.0, 0.0, wait
    if u3 < p[_LOSS] + p[_EXCHANGE]:
        return CHANGED, -gx, -gy, -gz, wait
    nx, ny, nz = direction(u1, u2)
    share = p[_SHARE]
    return CHANGED, share * (g * nx - gx), share * (g * ny - gy), share * (g * nz - gz), wait
