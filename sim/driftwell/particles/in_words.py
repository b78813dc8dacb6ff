"""Sizes, places and energies of clouds in words."""

from __future__ import annotations

from collections.abc import Iterable

from driftwell.constants import ELEMENTARY_CHARGE
from driftwell.forms.spelling import spelled


def energy_in_words(energy: float) -> str:
    """An energy in J, said in electronvolt, e.g. ``"30 keV"``."""
    return spelled(energy / ELEMENTARY_CHARGE, "eV")


def charge_in_words(charge: float) -> str:
    """A charge in C, said in elementary charges while they are few, e.g. ``"2000 e"``."""
    multiple = charge / ELEMENTARY_CHARGE
    return f"{multiple:.6g} e" if abs(multiple) < 1e5 else spelled(charge, "C")


def each_in_words(values: Iterable[float], unit: str, between: str = ", ") -> str:
    """Several values, said once where they are all the same."""
    said = [spelled(value, unit) for value in values]
    return said[0] if len(set(said)) == 1 else between.join(said)


def point_in_words(point: Iterable[float]) -> str:
    """A place, e.g. ``"(0 m, 0 m, 40 mm)"``."""
    return "(" + ", ".join(spelled(coordinate, "m") for coordinate in point) + ")"
