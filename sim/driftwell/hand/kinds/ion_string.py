"""Ions on a line in a harmonic well, and when they no longer stay on it.

l = (q^2 / (4 pi eps0 m omega_z^2))^(1/3)                                                (1)
two ions at +-l/4^(1/3), three at 0 and +-(5/4)^(1/3) l                                  (2)
"""

from __future__ import annotations

import math

from driftwell.constants import COULOMB_CONSTANT
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

FORMULA = Formula(
    "length scale of an ion string",
    "l = (q^2/(4 pi eps0 m omega_z^2))^(1/3); two ions are 2^(1/3) l apart",
    "D. F. V. James, Appl. Phys. B 66 (1998) 181. From memory.",
    "few ions at rest on the axis of a trap that is much stiffer across",
)
FEW = 50
STIFF = 3.0
"""Radial over axial frequency from which a few ions stay on a line."""


def length_scale(trap: Trap) -> float:
    """Equation (1), m."""
    square = COULOMB_CONSTANT * trap.body.charge**2
    return math.pow(square / (trap.body.mass * trap.adiabatic[2]), 1.0 / 3.0)


def values(scene: Scene) -> Values:
    """Of every species of which a few are in a trap that holds them."""
    for body in scene.kinds:
        trap = trap_of(scene, body)
        there = sum(group.number for group in scene.groups if group.body == body)
        if trap is None or trap.cyclotron or not 1 < there <= FEW:
            continue
        x, y, z = trap.adiabatic
        if min(x, y, z) <= 0.0:
            continue
        ratio = math.sqrt(min(x, y) / z)
        # the string folds near 0.73 N^0.86, known to some 15 %: J. P. Schiffer, Phys. Rev. Lett. 70
        # (1993) 818, from memory
        inside = (
            ratio > max(STIFF, 0.85 * there**0.86) and not trap.besides and len(scene.kinds) == 1
        )
        why = f"{there:.6g} ions, {ratio:.3g} times as stiff across in frequency"
        what = f"length scale of a string of {body.name}"
        yield HandValue(FORMULA, what, length_scale(trap), "m", inside, why)


KIND = HandKind((FORMULA,), values)
