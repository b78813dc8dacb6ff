"""Units: one registry, made when the first quantity is read.

The units library (pint) takes 0.4 s to load, so nothing imports this module's registry until a
scenario is read. Two of its definitions are replaced by CODATA 2022, so that "1 u" and "1 e" in a
scenario are the constants the forces are computed with.
"""

from __future__ import annotations

import re
from decimal import Decimal
from functools import lru_cache
from typing import TYPE_CHECKING

from driftwell import constants

if TYPE_CHECKING:
    from pint import UnitRegistry

_NUMBER_AND_UNIT = re.compile(
    r"""\s*(?P<number>[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)
        \s*(?P<unit>[A-Za-zµμΩ°%Å][A-Za-z0-9µμΩ°%Å*/^()\s._-]*|1/[A-Za-z][A-Za-z0-9*/^()\s._-]*)?\s*""",
    re.VERBOSE,
)
_LONGEST = 100


@lru_cache(maxsize=1)
def registry() -> UnitRegistry:
    """The one registry of units, with the atomic mass unit and elementary charge of CODATA 2022."""
    import pint

    units = pint.UnitRegistry(cache_folder=None)
    units.define(f"unified_atomic_mass_unit = {constants.ATOMIC_MASS!r} * kilogram = u = amu")
    units.define(f"elementary_charge = {constants.ELEMENTARY_CHARGE!r} * coulomb = e")
    return units


def split(text: str) -> tuple[Decimal, str] | None:
    """The number and the unit of ``"3.5 mm"``; None where the text is neither of the two.

    The number stays decimal, so that "10 us" times 1e-6 is the float nearest to 1e-5.
    """
    if len(text) > _LONGEST:
        return None
    match = _NUMBER_AND_UNIT.fullmatch(text)
    if match is None:
        return None
    return Decimal(match["number"]), (match["unit"] or "").strip()


@lru_cache(maxsize=512)
def to_si(unit: str, si_unit: str) -> tuple[Decimal, Decimal]:
    """Factor and offset that take a value in `unit` to `si_unit`: ``si = factor * value + offset``.

    Raises
    ------
    LookupError
        `unit` is not a unit; the text names the nearest known one where there is one.
    ValueError
        `unit` has another dimension than `si_unit`; the text says which.
    """
    import pint

    units = registry()
    try:
        found = units.Unit(unit)
    except pint.errors.UndefinedUnitError as fault:
        raise LookupError(f"no unit is called {unit!r}") from fault
    except Exception as fault:  # the parser fails in many ways on text that is no unit
        raise LookupError(f"{unit!r} is not a unit") from fault
    wanted = units.Unit(si_unit)
    if found.dimensionality != wanted.dimensionality:
        raise ValueError(f"{unit!r} is a unit of {_spelled(found)}")
    if wanted.dimensionality == units.Unit("Hz").dimensionality and "rad" in str(found):
        raise ValueError(f"{unit!r} is an angular frequency; give cycles per second")
    try:
        zero = float(units.Quantity(0.0, found).to(wanted).magnitude)
        one = float(units.Quantity(1.0, found).to(wanted).magnitude)
    except Exception as fault:
        raise LookupError(f"{unit!r} cannot be turned into {si_unit!r}") from fault
    if zero == 0.0:
        return Decimal(repr(one)), Decimal(0)
    return Decimal(repr(one)) - Decimal(repr(zero)), Decimal(repr(zero))


def _spelled(unit: object) -> str:
    """A dimension as words: ``[length] / [time]`` becomes ``length / time``."""
    text = str(getattr(unit, "dimensionality", "")).replace("[", "").replace("]", "")
    return text or "no dimension"
