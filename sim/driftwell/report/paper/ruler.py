"""What an axis shows: its limits, one SI prefix for all its numbers, and its label.

Values far from zero against their spread are shown from a round value next to them on, so that the
numbers along the axis stay short: "z - 1.25 m (µm)".
"""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]
Interval = tuple[float, float]

MARGIN = 0.05
"""Part of the span that is left free at each end."""
FAR = 0.02
"""An axis is shown from a round value on where its span is less than this part of its middle."""
ROUNDING = 1e-12
"""A span below this part of the values is rounding, not width."""
THIN = 1e-9
"""A span below this part of the whole thing's size is no width."""
DRAWABLE = 1e100
"""What is larger than this is not drawn: its span could not be worked out."""

_PREFIXES = ("a", "f", "p", "n", "µ", "m", "", "k", "M", "G", "T")
_FIRST_POWER = -18


@dataclass(frozen=True, slots=True)
class Ruler:
    """One axis: ``shown = (value - origin) / size``.

    low, high : limits, in SI
    unit : with its prefix, empty for a pure number
    origin_text : the origin's magnitude in words, empty where it is zero
    """

    low: float
    high: float
    size: float
    unit: str
    origin: float = 0.0
    origin_text: str = ""

    def shown(self, values: ArrayLike) -> Floats:
        """Values as they stand along the axis."""
        return (np.asarray(values, dtype=np.float64) - self.origin) / self.size

    @property
    def limits(self) -> Interval:
        """Limits as they stand along the axis."""
        low, high = self.shown([self.low, self.high])
        return float(low), float(high)

    @property
    def span(self) -> float:
        """Length of the axis, SI."""
        return self.high - self.low

    def label(self, name: str) -> str:
        """Name and unit, such as ``z (mm)``."""
        if self.origin_text:
            sign = "−" if self.origin > 0.0 else "+"
            name = f"{name} {sign} {self.origin_text}"
        return f"{name} ({self.unit})" if self.unit else name


def interval(
    values: ArrayLike, least: float = 0.0, zero: bool = False, margin: float = MARGIN
) -> Interval:
    """Limits that hold all values that are numbers, never of zero width.

    least : span taken where the values have none
    zero : whether zero must be within; it gets no margin where it is an end
    """
    found = np.asarray(values, dtype=np.float64).ravel()
    found = found[np.abs(found) < DRAWABLE]
    low, high = (float(found.min()), float(found.max())) if found.size else (0.0, 0.0)
    if zero:
        low, high = min(low, 0.0), max(high, 0.0)
    largest = max(abs(low), abs(high))
    if high - low <= max(ROUNDING * largest, THIN * least):
        half = 0.5 * (least or 0.2 * largest or 1.0)
        return (0.0, 2.0 * half) if zero and largest == 0.0 else (low - half, high + half)
    free = margin * (high - low)
    return (
        low if zero and low == 0.0 else low - free,
        high if zero and high == 0.0 else high + free,
    )


def widened(limits: Interval, span: float) -> Interval:
    """Limits about the same middle, at least `span` apart; those that begin at zero still do."""
    missing = max(span - (limits[1] - limits[0]), 0.0)
    below = 0.0 if limits[0] == 0.0 else 0.5 * missing
    return limits[0] - below, limits[1] + missing - below


def joined(intervals: Iterable[Interval]) -> Interval:
    """The limits that hold all of them."""
    lows, highs = zip(*intervals, strict=True)
    return min(lows), max(highs)


def ruler(limits: Interval, unit: str, size: float | None = None) -> Ruler:
    """The axis with these limits, in SI.

    size : the size to show values in, where another axis must have the same; else the prefix that
        leaves numbers below 1000
    """
    low, high = limits
    origin, text = _origin(low, high, unit)
    largest = max(abs(low - origin), abs(high - origin))
    if not unit:
        return Ruler(low, high, 1.0, "", origin, text)
    if size is None:
        size = prefix_size(largest)
    place = round((math.log10(size) - _FIRST_POWER) / 3.0)
    return Ruler(low, high, size, _PREFIXES[place] + unit, origin, text)


def prefix_size(largest: float) -> float:
    """Size of the SI prefix that leaves 1 to 999 of `largest`; the nearest where there is none."""
    power = 3 * math.floor(math.log10(largest) / 3.0 + 1e-9) if largest > 0.0 else 0
    return float(f"1e{min(max(power, _FIRST_POWER), _FIRST_POWER + 3 * (len(_PREFIXES) - 1))}")


def in_words(value: float, unit: str, digits: int = 3) -> str:
    """A value with its unit, as pictures write it: ``60 µm``."""
    number, _, name = spelled(value, unit, digits).partition(" ")
    name = name.replace("u", "µ", 1) if name == f"u{unit}" else name
    return f"{number.replace('-', '−')} {name}".strip()


def _origin(low: float, high: float, unit: str) -> tuple[float, str]:
    """The round value an axis is shown from, and its text; none where zero will do."""
    middle, span = 0.5 * (low + high), high - low
    if span >= FAR * abs(middle):
        return 0.0, ""
    step = 10.0 ** math.floor(math.log10(span))
    digits = math.floor(math.log10(abs(middle))) - round(math.log10(step)) + 1
    origin = float(f"{middle:.{digits - 1}e}")
    return origin, in_words(abs(origin), unit, digits)
