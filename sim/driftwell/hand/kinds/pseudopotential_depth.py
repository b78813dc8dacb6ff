"""Depth of an RF trap's pseudopotential, to the nearest electrode along each axis.

    D = m omega^2 R^2 / (2 |q|),   omega^2 = k0 + k1^2 / (2 Omega^2)                          (1)

in volts. With R = r0 of rods at the voltage V between neighbours (1) is q V / 8, q Mathieu's; with
the distance z0 of the caps of a three-dimensional trap, V between ring and caps, it is q_z V / 8.
"""

from __future__ import annotations

import math

from driftwell.answers.form import AXES
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

FORMULA = Formula(
    "Dehmelt's pseudopotential depth",
    "D = m (k0 + k1^2/(2 Omega^2)) R^2/(2 |q|)",
    "H. G. Dehmelt, Adv. At. Mol. Phys. 3 (1967) 53; R. F. Wuerker, H. Shelton and R. V. Langmuir, "
    "J. Appl. Phys. 30 (1959) 342. From memory.",
    "slow motion against the drive: Mathieu's q below 0.4; ideal electrodes",
)
ADIABATIC = 0.4
"""Mathieu's q up to which the pseudopotential holds (common practice, no source)."""


def depth(trap: Trap, axis: int) -> float:
    """Equation (1), V; negative where the trap pushes out along the axis."""
    return 0.5 * trap.adiabatic[axis] * trap.edge[axis] ** 2 / abs(trap.body.charge_to_mass)


def values(scene: Scene) -> Values:
    """Along every axis with an electrode, for every species in an RF trap."""
    for body in scene.kinds:
        trap = trap_of(scene, body)
        if trap is None or trap.drive == 0.0 or trap.cyclotron != 0.0:
            continue
        highest = max(q for _, q in trap.parameters)
        inside = highest <= ADIABATIC and not trap.besides
        for axis, name in enumerate(AXES):
            if math.isfinite(trap.edge[axis]) and trap.swing[axis] != 0.0:
                yield HandValue(
                    FORMULA,
                    f"trap depth for {body.name} along {name}",
                    depth(trap, axis),
                    "V",
                    inside,
                    trap.doubt() or f"q = {highest:.3g}, {'below' if inside else 'above'} 0.4",
                )


KIND = HandKind((FORMULA,), values)
