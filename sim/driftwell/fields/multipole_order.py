"""The order of a two-dimensional multipole, and what it is called."""

from __future__ import annotations

from typing import Annotated

from driftwell.forms import Bound, Count

Order = Annotated[Count, Bound(least=1, most=64)]
"""1 dipole, 2 quadrupole, 3 sextupole and so on: half the number of poles."""

_NAMES = {1: "dipole", 2: "quadrupole", 3: "sextupole", 4: "octupole", 5: "decapole"}


def multipole_name(order: int) -> str:
    """A multipole by name, e.g. ``sextupole``, or by its number of poles, e.g. ``22-pole``."""
    return _NAMES.get(order, f"{2 * order}-pole")
