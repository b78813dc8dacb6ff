"""Numbers with units as a person writes them: 0.0035 m becomes "3.5 mm"."""

from __future__ import annotations

import math

_PREFIXES = {
    -15: "f",
    -12: "p",
    -9: "n",
    -6: "u",
    -3: "m",
    0: "",
    3: "k",
    6: "M",
    9: "G",
    12: "T",
}
_LEAST, _MOST = min(_PREFIXES), max(_PREFIXES)


def spelled(value: float, unit: str, digits: int = 6) -> str:
    """An SI value with the prefix that leaves 1 to 999 before the unit, e.g. ``"20 kV/m"``.

    A value beyond the prefixes is written with a power of ten. The prefix is put before the first
    unit of a quotient, so that the text can be read back as the same quantity.
    """
    if value == 0.0 or not math.isfinite(value):
        return f"{value:g} {unit}"
    rounded = float(f"{value:.{digits - 1}e}")
    power = 3 * math.floor(math.log10(abs(rounded)) / 3.0 + 1e-9)
    if not _LEAST <= power <= _MOST:
        return f"{rounded:.{digits}g} {unit}"
    return f"{rounded / 10.0**power:.{digits}g} {_PREFIXES[power]}{unit}"
