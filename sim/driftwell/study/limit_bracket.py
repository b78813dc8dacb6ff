"""Closing in on the crossing of a function that is known without error.

Two neighbouring values on different sides of zero hold the crossing between them, whatever the
function is. Where it is smooth, inverse interpolation through the nearest four values foretells the
place, and values a little to the left and right of it close the bracket from both sides at once.
The distance is twice what the foretelling changed by in the last round, so that it shrinks as
interpolation becomes better. Where the bracket has not shrunk as it does by plain division, it is
divided evenly: a step costs as many runs as bisection and no more.

References
----------
R. P. Brent, Algorithms for Minimization without Derivatives (1973), ch. 4 (inverse interpolation
held in a bracket); F. N. Fritsch, R. E. Carlson, SIAM J. Numer. Anal. 17 (1980) 238 (monotone
cubics). From memory.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

_FIRST = 0.25
"""Distance of the first pair from the place foretold, in the bracket's width."""
_WIDEST = 1.0 / 3.0
_NARROWEST = 0.4
"""Least distance, in the width that is to be reached."""


@dataclass(frozen=True, slots=True)
class Bracket:
    """Neighbours on different sides, and where the crossing is thought to be.

    smooth : whether the values around it all rise, or all fall, so that they foretell it
    """

    low: float
    high: float
    foretold: float
    smooth: bool

    @property
    def width(self) -> float:
        """Of the range."""
        return self.high - self.low


def brackets(at: Floats, value: Floats) -> list[Bracket]:
    """All gaps between neighbours on different sides; zero itself is above."""
    above = value >= 0.0
    return [
        Bracket(float(at[k]), float(at[k + 1]), *_foretold(at, value, k))
        for k in np.flatnonzero(above[:-1] != above[1:]).tolist()
    ]


def division(bracket: Bracket, before: Bracket | None, target: float, count: int) -> list[float]:
    """Places (`count`) to look at next, to bring the bracket to the width `target`."""
    slow = before is not None and bracket.width > 1.5 * before.width / (count + 1)
    even = [bracket.low + bracket.width * (k + 1) / (count + 1) for k in range(count)]
    if slow or not bracket.smooth:
        return even
    change = _FIRST * bracket.width
    if before is not None:
        change = 2.0 * abs(bracket.foretold - before.foretold)
    off = min(max(change, _NARROWEST * target), _WIDEST * bracket.width)
    if count == 1:
        farther = 1.0 if bracket.foretold < 0.5 * (bracket.low + bracket.high) else -1.0
        return [bracket.foretold + farther * off]
    found = bracket.foretold + off * np.linspace(-1.0, 1.0, count)
    inside = 0.02 * bracket.width
    return [float(each) for each in np.clip(found, bracket.low + inside, bracket.high - inside)]


def _foretold(at: Floats, value: Floats, k: int) -> tuple[float, bool]:
    """The crossing between numbers k and k + 1, and whether inverse interpolation gave it."""
    from scipy.interpolate import PchipInterpolator

    near = slice(max(0, k - 1), k + 3)
    x, y = at[near], value[near]
    steps = np.diff(y)
    smooth = bool(np.all(steps > 0.0) or np.all(steps < 0.0))
    if smooth:
        order = np.argsort(y)
        found = float(PchipInterpolator(y[order], x[order])(0.0))
    else:
        found = float(at[k] - value[k] * (at[k + 1] - at[k]) / (value[k + 1] - value[k]))
    return min(max(found, float(at[k])), float(at[k + 1])), smooth
