"""The answers of a search put together by places: means, and how far to trust them.

Of the n runs at a place with values y and errors e the mean is sum(y)/n. Its error is, by what is
asked for,

    auto       sqrt(sum(e^2)) / n, times the larger of 1 and k                              (1)
               k^2 = sum over places and runs of (y - mean)^2 / e^2 / (runs - places)
    scatter    s t / sqrt(n), as well where some error is not known                         (2)
               s^2 = sum over places and runs of (y - mean)^2 / (runs - places)
    none       0

with t the factor by which Student's distribution of as many degrees of freedom is wider than the
Gaussian at 95 %. Both k and s are taken from all places with several runs, which are those next to
the crossing: a single place has too few runs to judge their scatter by.

Reference: Student, Biometrika 6 (1908) 1. From memory.
"""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Literal

import numpy as np

from driftwell.study.crossing import Known

_GAUSSIAN = 1.959964
"""Deviations that hold 95 % of a Gaussian."""


@dataclass(frozen=True, slots=True)
class Reading:
    """What one run answered; `error` is None where none is known."""

    value: float
    error: float | None


@dataclass(frozen=True, slots=True)
class Pooled:
    """Means at places, and the error of a single run.

    known : None where no error can be told before a place has several runs
    single : median error of one run, at the places nearest to the threshold
    scatter : how many times larger the scatter of seeds is than the runs' own errors; None where
        that is not known
    freedom : runs beyond the first of each place
    """

    known: Known | None
    single: float
    scatter: float | None
    freedom: int

    @property
    def exact(self) -> bool:
        """Whether no answer has an error."""
        return self.known is not None and not self.known.error.any()


def pooled(
    readings: Mapping[float, Sequence[Reading]],
    threshold: float,
    noise: Literal["auto", "scatter", "none"],
) -> Pooled:
    """The readings by their places, put together; each place has one at least."""
    at = np.array(sorted(readings))
    groups = [readings[place] for place in at]
    count = np.array([len(group) for group in groups], np.float64)
    mean = np.array([math.fsum(each.value for each in group) / len(group) for group in groups])
    value = mean - threshold
    freedom = int(count.sum()) - len(groups)
    if noise == "none":
        return Pooled(Known(at, value, np.zeros(at.size)), 0.0, None, freedom)
    errors = [each.error for group in groups for each in group]
    off = [each.value - m for group, m in zip(groups, mean, strict=True) for each in group]
    own = [error for error in errors if error is not None and math.isfinite(error)]
    if noise == "scatter" or len(own) < len(errors):
        if not freedom:
            return Pooled(None, math.inf, None, freedom)
        single = math.sqrt(math.fsum(x * x for x in off) / freedom) * _wider(freedom)
        return Pooled(Known(at, value, single / np.sqrt(count)), single, None, freedom)
    factor, scatter = 1.0, None
    if freedom and all(own):
        squares = (x * x / (e * e) for x, e in zip(off, own, strict=True))
        scatter = math.sqrt(math.fsum(squares) / freedom)
        factor = max(1.0, scatter)
    means = [
        math.hypot(*(each.error or 0.0 for each in group)) / len(group) * factor for group in groups
    ]
    error = np.array(means)
    near = np.argsort(np.abs(value), kind="stable")[:3]
    single = float(np.median((error * np.sqrt(count))[near]))
    return Pooled(Known(at, value, error), single, scatter, freedom)


def _wider(freedom: int) -> float:
    """How much wider Student's distribution is than the Gaussian, at 95 %."""
    from scipy.special import stdtrit

    return float(stdtrit(freedom, 0.975)) / _GAUSSIAN
