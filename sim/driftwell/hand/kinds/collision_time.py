"""Mean time between collisions with the atoms of a gas.

hard spheres      1/tau = n sigma <g>,   <g> = (8 k T / (pi mu))^(1/2)                   (1)
induced dipole    1/tau = n k_L,   k_L = |q|/(2 eps0) (alpha / mu)^(1/2)                 (2)
"""

from __future__ import annotations

import math

from driftwell.constants import BOLTZMANN
from driftwell.forms.body import Body
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.processes.gas_collisions import GasCollisions, HardSphere

SPHERES = Formula(
    "mean collision time, hard spheres",
    "1/tau = n sigma (8 k T/(pi mu))^(1/2)",
    "S. Chapman and T. G. Cowling, The Mathematical Theory of Non-uniform Gases (1970). From "
    "memory.",
    "ions as slow as the gas's own heat makes them; faster ones collide more often",
)
LANGEVIN = Formula(
    "Langevin's collision time",
    "1/tau = n |q|/(2 eps0) (alpha/mu)^(1/2), alpha = 4 pi eps0 alpha_V",
    "P. Langevin, Ann. Chim. Phys. 5 (1905) 245; G. Gioumousis and D. P. Stevenson, J. Chem. Phys. "
    "29 (1958) 294. From memory.",
    "an induced dipole that takes every ion it captures, at any speed",
)


def reduced_mass(gas: GasCollisions, body: Body) -> float:
    """mu, kg."""
    return body.mass * gas.mass / (body.mass + gas.mass)


def collision_rate(gas: GasCollisions, body: Body) -> float:
    """Equation (1) or (2), 1/s."""
    if isinstance(gas.collision, HardSphere):
        speed = math.sqrt(8.0 * BOLTZMANN * gas.temperature / (math.pi * reduced_mass(gas, body)))
        return gas.density() * gas.collision.cross_section * speed
    return gas.density() * gas.capture_rate(body, gas.collision.polarisability)


def hottest(scene: Scene, body: Body) -> float:
    """The largest temperature that clouds of a species begin with, their drift in it, K."""
    found = [
        group.temperature + body.mass * group.speed**2 / (3.0 * BOLTZMANN)
        for group in scene.groups
        if group.body == body
    ]
    return max(found, default=0.0)


def values(scene: Scene) -> Values:
    """Of every species in every gas that acts on it."""
    for gas in scene.scenario.process:
        if not isinstance(gas, GasCollisions):
            continue
        for body in scene.kinds:
            if not any(
                gas.acts_on(each.name, each.species) and each.species == body.name
                for each in scene.moving
            ):
                continue
            spheres = isinstance(gas.collision, HardSphere)
            # relative speed squared of ion and gas over that of equal temperatures
            ratio = (hottest(scene, body) / body.mass + gas.temperature / gas.mass) / (
                gas.temperature / reduced_mass(gas, body)
            )
            inside = not spheres or ratio < 2.0
            why = f"{gas.density():.4g} 1/m^3 of gas"
            if not inside:
                why += f"; ions begin {math.sqrt(ratio):.2g} times as fast against the gas"
            yield HandValue(
                SPHERES if spheres else LANGEVIN,
                f'mean collision time of {body.name} in "{gas.name}"',
                1.0 / collision_rate(gas, body),
                "s",
                inside,
                why,
            )


KIND = HandKind((SPHERES, LANGEVIN), values)
