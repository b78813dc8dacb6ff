"""Shades for values that have a sign, or none: light about zero, apart in grey as well.

References
----------
F. Crameri, G. E. Shephard, P. J. Heron, Nature Communications 11 (2020) 5444,
doi:10.1038/s41467-020-19160-7 (from memory): what maps of colours must keep to be read by all.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from matplotlib.colors import Colormap, LinearSegmentedColormap
from numpy.typing import ArrayLike

_NEGATIVE = ("#023858", "#0072b2", "#8ec3e6", "#f4f4f4")
_POSITIVE = ("#f4f4f4", "#f5b183", "#d55e00", "#5f2a00")


@dataclass(frozen=True, slots=True)
class Shades:
    """Colours from `low` to `high`, both in SI."""

    colours: Colormap
    low: float
    high: float

    @property
    def paler(self) -> Colormap:
        """The same colours nearer to white, for what lines and letters stand on."""
        full = self.colours(np.linspace(0.0, 1.0, 256))
        return LinearSegmentedColormap.from_list("paler", 0.55 * full + 0.45)


def shades(values: ArrayLike, share: float = 1.0) -> Shades:
    """Colours for values: blue below zero, orange above, as far on both sides where both occur.

    share : part of the values that must be within the ends; the others take the ends' colours
    """
    found = np.asarray(values, dtype=np.float64).ravel()
    found = found[np.isfinite(found)]
    largest = float(np.quantile(np.abs(found), share)) if found.size else 0.0
    largest = largest or (float(np.abs(found).max()) if found.size else 0.0) or 1.0
    below, above = bool((found < 0.0).any()), bool((found > 0.0).any())
    if below and above:
        names: tuple[str, ...] = (*_NEGATIVE, *_POSITIVE[1:])
        return Shades(_map(names), -largest, largest)
    if below:
        return Shades(_map(_NEGATIVE), -largest, 0.0)
    return Shades(_map(_POSITIVE), 0.0, largest)


def _map(names: tuple[str, ...]) -> Colormap:
    return LinearSegmentedColormap.from_list("signed", list(names))
