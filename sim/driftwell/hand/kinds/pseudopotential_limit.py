"""How many charges a trap without magnet holds: its well balanced by their own push.

    n = eps0 m (k_x + k_y + k_z) / q^2                                                       (1)
    N = n (4 pi / 3) a^2 c                                                                   (2)

with the stiffness k of the (pseudo)potential. The spheroid of (2) has the shape the well gives it
(:mod:`driftwell.hand.ellipsoid`), and touches the nearest electrode. Of rods without a well along
the axis (2) is the number in a metre, n pi a^2.
"""

from __future__ import annotations

import math

from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.forms.body import Body
from driftwell.hand.ellipsoid import aspect_of
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.kinds.pseudopotential_depth import ADIABATIC
from driftwell.hand.scene import Scene
from driftwell.hand.trap import Trap, trap_of

DENSITY = Formula(
    "density limit by pseudopotential balance",
    "n = eps0 m (k_x + k_y + k_z)/q^2",
    "H. G. Dehmelt, Adv. At. Mol. Phys. 3 (1967) 53; D. H. E. Dubin and T. M. O'Neil, Rev. Mod. "
    "Phys. 71 (1999) 87. From memory.",
    "a cold cloud of many charges of one kind; Mathieu's q below 0.4; no magnet",
)
NUMBER = Formula(
    "charge limit by pseudopotential balance",
    "N = n (4 pi/3) a^2 c for the spheroid of that density which touches the electrodes",
    "as for the density; the spheroid: O. D. Kellogg, Foundations of Potential Theory (1929). "
    "From memory.",
    "the density's own range; an upper bound, for a warm cloud loses charges well before it",
)


def balanced_density(trap: Trap) -> float:
    """Equation (1), 1/m^3."""
    return ELECTRIC_CONSTANT * trap.body.mass * sum(trap.adiabatic) / trap.body.charge**2


def most_charges(trap: Trap) -> tuple[float, str] | None:
    """Equation (2) and its unit: a number, or one in a metre; None where no electrode is stated."""
    kx, ky, kz = trap.adiabatic
    density = balanced_density(trap)
    radius = min(trap.edge[0], trap.edge[1])
    if min(kx, ky) <= 0.0 or kz < 0.0:
        return None
    if kz == 0.0:
        return (density * math.pi * radius**2, "1/m") if math.isfinite(radius) else None
    aspect = aspect_of(kz / (kx + ky + kz))
    if aspect is None:
        return None
    a = min(radius, trap.edge[2] / aspect)
    if not math.isfinite(a):
        return None
    return density * 4.0 * math.pi / 3.0 * a**3 * aspect, "1"


def values(scene: Scene) -> Values:
    """For every species in a trap without magnet that holds it."""
    for body in scene.kinds:
        trap = trap_of(scene, body)
        if trap is None or trap.cyclotron != 0.0 or sum(trap.adiabatic) <= 0.0:
            continue
        if min(trap.adiabatic[:2]) <= 0.0:
            continue
        inside, why = _judged(scene, trap, body)
        named = f"of {body.name}"
        density = balanced_density(trap)
        yield HandValue(DENSITY, f"largest density {named}", density, "1/m^3", inside, why)
        most = most_charges(trap)
        if most is not None:
            there = sum(group.number for group in scene.groups if group.body == body)
            what = f"most particles {named}" + (" in a metre" if most[1] == "1/m" else "")
            if most[1] == "1":
                why = f"{there:.6g} are there, {there / most[0]:.2g} of it; {why}"
            yield HandValue(NUMBER, what, most[0], most[1], inside, why)


def _judged(scene: Scene, trap: Trap, body: Body) -> tuple[bool, str]:
    reasons = [trap.doubt()] if trap.besides else []
    highest = max((q for _, q in trap.parameters), default=0.0) if trap.drive else 0.0
    if highest > ADIABATIC:
        reasons.append(f"q = {highest:.3g} is above {ADIABATIC}")
    if len(scene.kinds) > 1:
        reasons.append("there are several kinds")
    return not reasons, "; ".join(reasons) or "one kind of charge in linear fields"


KIND = HandKind((DENSITY, NUMBER), values)
