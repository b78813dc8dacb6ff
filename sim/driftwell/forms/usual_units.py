"""The usual units by their factors, so that a scenario in them is read without the units library.

The library takes 0.4 s to load; it is asked for every other unit, and its word decides: a test
compares each entry with it, to the last bit.
"""

from __future__ import annotations

from decimal import Decimal

from driftwell.constants import ATOMIC_MASS

_FACTORS: dict[str, dict[str, str]] = {
    "m": {
        "m": "1.0",
        "cm": "0.01",
        "mm": "0.001",
        "um": "0.000001",
        "nm": "1E-9",
        "pm": "1E-12",
        "km": "1000.0",
    },
    "s": {
        "s": "1.0",
        "ms": "0.001",
        "us": "0.000001",
        "ns": "1E-9",
        "ps": "1E-12",
        "fs": "1E-15",
        "min": "60.0",
        "h": "3600.0",
    },
    "Hz": {
        "Hz": "1.0",
        "mHz": "0.001",
        "kHz": "1000.0",
        "MHz": "1000000.0",
        "GHz": "1000000000.0",
        "THz": "1000000000000.0",
        "1/s": "1.0",
    },
    "rad": {
        "rad": "1.0",
        "mrad": "0.001",
        "urad": "0.000001",
        "deg": "0.017453292519943295",
    },
    "kg": {
        "kg": "1.0",
        "g": "0.001",
        "u": repr(ATOMIC_MASS),
    },
    "C": {
        "C": "1.0",
        "mC": "0.001",
        "uC": "0.000001",
        "nC": "1E-9",
        "pC": "1E-12",
        "fC": "1E-15",
        "e": "1.602176634E-19",
    },
    "V": {
        "V": "1.0",
        "mV": "0.001",
        "uV": "0.000001",
        "kV": "1000.0",
        "MV": "1000000.0",
    },
    "A": {
        "A": "1.0",
        "mA": "0.001",
        "uA": "0.000001",
        "nA": "1E-9",
        "pA": "1E-12",
        "kA": "1000.0",
    },
    "J": {
        "J": "1.0",
        "eV": "1.602176634E-19",
        "meV": "1.6021766339999998E-22",
        "keV": "1.602176634E-16",
        "MeV": "1.6021766339999998E-13",
        "GeV": "1.6021766339999998E-10",
    },
    "K": {
        "K": "1.0",
        "mK": "0.001",
        "uK": "0.000001",
        "nK": "1E-9",
    },
    "m/s": {
        "m/s": "1.0",
        "km/s": "1000.0",
        "mm/s": "0.001",
        "cm/s": "0.01",
    },
    "V/m": {
        "V/m": "1.0",
        "kV/m": "1000.0",
        "MV/m": "1000000.0",
        "V/cm": "100.0",
        "kV/cm": "100000.0",
        "V/mm": "1000.0",
        "mV/m": "0.001",
    },
    "T": {
        "T": "1.0",
        "mT": "0.001",
        "uT": "0.000001",
    },
    "V/m^2": {
        "V/m^2": "1.0",
        "V/cm^2": "10000.0",
        "V/mm^2": "1000000.0",
    },
    "T/m": {
        "T/m": "1.0",
        "mT/mm": "1.0",
        "mT/m": "0.001",
    },
    "Pa": {
        "Pa": "1.0",
        "mPa": "0.001",
        "kPa": "1000.0",
        "hPa": "100.0",
        "mbar": "100.0",
        "bar": "100000.0",
    },
    "m^2": {
        "m^2": "1.0",
        "cm^2": "0.0001",
        "mm^2": "0.000001",
        "nm^2": "1E-18",
    },
    "m^3": {
        "m^3": "1.0",
        "cm^3": "0.0000010000000000000002",
        "angstrom^3": "1E-30",
    },
    "Pa*s": {
        "Pa s": "1.0",
        "uPa s": "0.000001",
        "mPa s": "0.001",
    },
    "m^2/(V*s)": {
        "m^2/(V s)": "1.0",
        "cm^2/(V s)": "0.0001",
    },
    "m*rad": {
        "m rad": "1.0",
        "mm mrad": "0.000001",
        "um rad": "0.000001",
        "m*rad": "1.0",
        "mm*mrad": "0.000001",
        "um*rad": "0.000001",
    },
}

USUAL: dict[tuple[str, str], Decimal] = {
    (unit, si_unit): Decimal(factor)
    for si_unit, units in _FACTORS.items()
    for unit, factor in units.items()
}
"""By unit and SI unit: what a value in the one is to be multiplied with to be in the other."""
