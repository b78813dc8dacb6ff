"""Species: kinds of particles, those everyone knows and those a scenario declares."""

from __future__ import annotations

from collections.abc import Mapping

from scipy.constants import physical_constants

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.forms import Charge, Form, Mass, NonZero, Positive, key
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled

_HEAVY = 1e6
"""Atomic mass units from which a mass is said in grams."""


class SpeciesForm(Form):
    """A kind of particle, by mass and charge."""

    mass: Positive[Mass] = key("mass of one particle", example="137.905 u")
    charge: NonZero[Charge] = key("charge of one particle, with its sign", example="1 e")

    def words(self) -> str:
        """One sentence for `driftwell check`."""
        units = self.mass / ATOMIC_MASS
        mass = f"{units:.9g} u" if units < _HEAVY else spelled(self.mass * 1e3, "g")
        return f"mass {mass}, charge {self.charge / ELEMENTARY_CHARGE:+.6g} e"


def _known(name: str, quantity: str, charges: int) -> tuple[str, Body]:
    return name, Body(name, physical_constants[quantity][0], charges * ELEMENTARY_CHARGE)


BUILT_IN: dict[str, Body] = dict(
    [
        _known("electron", "electron mass", -1),
        _known("positron", "electron mass", +1),
        _known("muon", "muon mass", -1),
        _known("antimuon", "muon mass", +1),
        _known("proton", "proton mass", +1),
        _known("antiproton", "proton mass", -1),
        _known("deuteron", "deuteron mass", +1),
        _known("triton", "triton mass", +1),
        _known("helion", "helion mass", +2),
        _known("alpha", "alpha particle mass", +2),
    ]
)
"""Species a scenario may name without declaring them; masses of CODATA 2022."""


def bodies(declared: Mapping[str, SpeciesForm]) -> dict[str, Body]:
    """All species a scenario may name: the built-in ones, then those it declares.

    A declared species takes the place of a built-in one of the same name.
    """
    return BUILT_IN | {
        name: Body(name, species.mass, species.charge) for name, species in declared.items()
    }
