"""The largest density a magnet holds.

n_B = eps0 B^2 / (2 m)                                                                   (1)
"""

from __future__ import annotations

from driftwell.constants import ELECTRIC_CONSTANT
from driftwell.fields.uniform_magnetic import UniformMagnetic
from driftwell.forms.waveforms import largest_value
from driftwell.hand.formula import Formula, HandKind, HandValue, Values
from driftwell.hand.scene import Scene

FORMULA = Formula(
    "Brillouin density limit",
    "n_B = eps0 B^2/(2 m)",
    "L. Brillouin, Phys. Rev. 67 (1945) 260. From memory.",
    "charges of one sign that turn about a uniform magnet; below it they can be held across",
)


def brillouin_density(flux: float, mass: float) -> float:
    """Equation (1), 1/m^3."""
    return ELECTRIC_CONSTANT * flux**2 / (2.0 * mass)


def values(scene: Scene) -> Values:
    """Of every species in a uniform magnet."""
    magnets = [f for f in scene.scenario.field if isinstance(f, UniformMagnetic)]
    flux = sum(largest_value(magnet.strength) for magnet in magnets)
    if flux == 0.0:
        return
    for body in scene.kinds:
        limit = brillouin_density(flux, body.mass)
        dense = max(
            (g.peak_density for g in scene.groups if g.body == body and g.solid), default=0.0
        )
        inside = dense <= limit and len(magnets) == 1
        why = "no cloud of it fills a volume at the start"
        if dense > 0.0:
            why = f"{dense:.3g} 1/m^3 are there at the start, {dense / limit:.2g} of it"
        if dense > limit:
            why += ": the magnet cannot hold them together across"
        yield HandValue(FORMULA, f"largest density of {body.name}", limit, "1/m^3", inside, why)


KIND = HandKind((FORMULA,), values)
