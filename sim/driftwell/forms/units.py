"""Units: one registry, made when the first quantity is read.

The units library (pint) takes 0.4 s to load, so nothing imports this module's registry until a
scenario uses a unit that is not among the usual ones (:mod:`driftwell.forms.usual_units`). Two of
its definitions are replaced by CODATA 2022, so that "1 u" and "1 e" in a scenario are the constants
the forces are computed with.
"""

from __future__ import annotations

import difflib
import re
from decimal import Decimal
from functools import lru_cache
from typing import TYPE_CHECKING, Any

from driftwell import constants
from driftwell.forms.usual_units import USUAL

if TYPE_CHECKING:
    from pint import Unit, UnitRegistry

_NUMBER_AND_UNIT = re.compile(
    r"""\s*(?P<number>[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)
        \s*(?P<unit>[A-Za-zµμΩ°%Å][A-Za-z0-9µμΩ°%Å*/^()\s._-]*|1/[A-Za-z][A-Za-z0-9*/^()\s._-]*)?\s*""",
    re.VERBOSE,
)
_LONGEST = 100
_POWER_OF_POWER = re.compile(r"(?:\*\*|\^)[^A-Za-zµμΩ]*(?:\*\*|\^)|\d{3}")
_USUAL = (
    *("m", "cm", "mm", "um", "nm", "pm", "km", "s", "ms", "us", "ns", "ps", "min", "h"),
    *("Hz", "kHz", "MHz", "GHz", "THz", "rad", "mrad", "urad", "deg", "kg", "g", "u"),
    *("C", "mC", "uC", "nC", "pC", "fC", "e", "V", "mV", "uV", "kV", "MV"),
    *("A", "mA", "uA", "nA", "pA", "kA", "J", "eV", "meV", "keV", "MeV", "GeV"),
    *("K", "mK", "uK", "nK", "m/s", "km/s", "V/m", "kV/m", "MV/m", "V/cm", "kV/cm", "V/mm"),
    *("T", "mT", "uT", "V/m^2", "V/cm^2", "V/mm^2", "T/m", "mT/mm", "m*rad", "mm*mrad", "um*rad"),
)
_DIMENSIONS = (
    ("length", "m"),
    ("time", "s"),
    ("frequency", "Hz"),
    ("mass", "kg"),
    ("charge", "C"),
    ("voltage", "V"),
    ("current", "A"),
    ("energy", "J"),
    ("temperature", "K"),
    ("speed", "m/s"),
    ("electric field", "V/m"),
    ("magnetic field", "T"),
    ("power", "W"),
    ("pressure", "Pa"),
    ("force", "N"),
    ("area", "m^2"),
    ("volume", "m^3"),
    ("acceleration", "m/s^2"),
)


@lru_cache(maxsize=1)
def registry() -> UnitRegistry[Any]:
    """The one registry of units, with the atomic mass unit and elementary charge of CODATA 2022."""
    import pint

    units: UnitRegistry[Any] = pint.UnitRegistry(cache_folder=None)
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
    usual = USUAL.get((unit, si_unit))
    if usual is not None:
        return usual, Decimal(0)
    import pint

    if _POWER_OF_POWER.search(unit):  # would be worked out, for hours
        raise LookupError(f"{unit!r} is not a unit")
    units = registry()
    try:
        found = units.Unit(unit)
    except pint.errors.UndefinedUnitError as fault:
        meant = _usual_unit(unit, units.Unit(si_unit))
        hint = f"; did you mean {meant!r}?" if meant is not None else ""
        raise LookupError(f"no unit is called {unit!r}{hint}") from fault
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


def _usual_unit(unit: str, wanted: Unit) -> str | None:
    """The usual unit with the dimension of `wanted` that was probably meant, or None."""
    named = wanted._REGISTRY.Unit
    fitting = [usual for usual in _USUAL if named(usual).dimensionality == wanted.dimensionality]
    for same in (str.lower, lambda text: "".join(sorted(text.lower()))):
        for usual in fitting:
            if same(usual) == same(unit):
                return usual
    by_long_name = {str(named(usual)).lower(): usual for usual in fitting}
    if unit.lower() in by_long_name:
        return by_long_name[unit.lower()]
    close = difflib.get_close_matches(unit, fitting, n=1, cutoff=0.6)
    return close[0] if close else None


def _spelled(unit: Unit) -> str:
    """What a unit measures: ``a voltage``, else its dimension such as ``length / time ** 3``."""
    for name, usual in _DIMENSIONS:
        if unit.dimensionality == registry().Unit(usual).dimensionality:
            return name
    text = str(unit.dimensionality).replace("[", "").replace("]", "")
    return text if text != "dimensionless" else "no dimension"
