"""The error by chance of a single run: its own sampling error, held against runs of other seeds.

A run tells its sampling error e from its own charges, taken as drawn independently. Of n seeds the
scatter s is free of that assumption, but of few seeds it is rough. While e is right,

    (n - 1) s^2 / e^2  is distributed as chi^2 of n - 1 degrees of freedom.                  (1)

Within the middle 95 % of that, e stands: it is the finer of the two. Outside, the seeds contradict
it: charges are laid out evenly, or are not independent; then s stands, widened as few values need.
Where an answer is a part of a whole, or all seeds agree to the last digit, a scatter that is too
small proves nothing (none lost of 20 in four runs says little of one in a thousand), and the
larger of the two stands.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from functools import lru_cache
from statistics import stdev

from scipy.stats import chi2

from driftwell.answers.answer import Answer
from driftwell.answers.sampling import few_independent

OF_THE_WHOLE = ("fraction-left", "fraction-through", "transmission")
"""Questions whose answers are parts of a whole: a tolerance means so much of the whole."""
_TAIL = 0.025


@dataclass(frozen=True, slots=True)
class Chance:
    """An error by chance, in the answer's unit, and where it is from.

    error : not a number where none is known
    """

    error: float
    how: str


def chance_of(answer: Answer, seeds: Sequence[float]) -> Chance:
    """The error by chance of one run's answer.

    seeds : its value in all runs that differ by the seed only, its own first
    """
    own = answer.error
    if own is not None and not math.isfinite(own):
        own = None
    if len(seeds) < 2:
        return Chance(math.nan if own is None else own, "unknown" if own is None else "sampling")
    degrees = len(seeds) - 1
    scatter = stdev(seeds)
    widened = Chance(scatter * few_independent(degrees), f"scatter of {len(seeds)} seeds")
    if own is None:
        return widened
    borne_out = Chance(own, f"sampling, borne out by {len(seeds)} seeds")
    if own == 0.0:
        return widened if scatter > 0.0 else borne_out
    ratio = degrees * (scatter / own) ** 2
    least, most = _middle(degrees)
    if ratio > most:
        return widened
    if scatter == 0.0 or answer.ask in OF_THE_WHOLE or ratio >= least:
        return borne_out
    return widened


@lru_cache
def _middle(degrees: int) -> tuple[float, float]:
    """What holds the middle 95 % of eq. 1."""
    return float(chi2.ppf(_TAIL, degrees)), float(chi2.ppf(1.0 - _TAIL, degrees))
