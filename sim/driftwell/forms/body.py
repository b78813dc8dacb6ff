"""What a part needs to know of a species: its name, mass and charge."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Body:
    """One particle of a species: mass in kg, charge in C (signed, not zero)."""

    name: str
    mass: float
    charge: float

    @property
    def charge_to_mass(self) -> float:
        """C/kg, signed."""
        return self.charge / self.mass
