"""Where a noisy function crosses zero: what a few values with errors say of the place.

The function is known at places x_i of [0, 1] as y_i with the standard error s_i. What it is
between them is not known, so an average over several models is taken, each weighted by how well it
foretells the values (its evidence):

    smooth    a Gaussian process of mean 0 and covariance A^2 (m(|x - x'|/l) + 1)             (1)
              m of Matern's family with nu = 1/2, 3/2, 5/2, from rough to smooth
    jump      two such processes that know nothing of each other, left and right of a jump    (2)
              anywhere, all places of it alike before anything is known

with many scales A and lengths l of both. The function rises through zero (or falls; then its sign
is turned), so that the crossing lies left of x where the function is positive there:

    P(crossing < x) = P(f(x) > 0) = normal(mean f(x) / spread f(x))                           (3)

for the smooth models. For the second it is the place of the jump, anywhere in the gap between two
neighbouring values, ends included. The sum of both is made to rise where chance makes it fall, by
the nearest rising function (isotonic regression), in which what is nearly certain weighs most.

Of the smooth models the one that is nearest to the truth wins soon, and values far away help; of a
step nothing is claimed but that it lies in its gap. The intervals have been held against functions
of many shapes with known crossings, see docs/numerics/limits.md.

References
----------
C. E. Rasmussen, C. K. I. Williams, Gaussian Processes for Machine Learning (MIT Press, 2006), sec.
2.2 and eq. 2.30 (evidence), eq. 4.16 and 4.17 (Matern's family). From memory.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

_SMOOTHNESS = (0.5, 1.5, 2.5)
_LENGTHS = (0.02, 0.05, 0.12, 0.3, 0.7, 1.6, 4.0)
_SCALES = (0.1, 0.3, 1.0, 3.0, 10.0)
"""In the largest distance of a value from zero."""
_JUMP_LENGTHS = (0.12, 0.7, 4.0)
_COARSE, _FINE = 128, 256
"""Places that are looked at: over all, and over where the crossing may be."""
_ROUNDING = 1e-9
"""Variance that is added to keep matrices positive, in that of the model."""
_CERTAIN = 1e-4
_AT_THE_ENDS = 0.1
"""Probability of a jump at each end of its gap, so that the whole gap is in the interval.

Where in it the jump is depends on how the places were chosen, which is near where it was thought.
"""


@dataclass(frozen=True, slots=True)
class Known:
    """Places (n,), ascending, values (n,) from which the threshold is taken off, errors (n,)."""

    at: Floats
    value: Floats
    error: Floats

    @property
    def deviations(self) -> Floats:
        """How many errors each value is away from zero; infinite where it has none."""
        with np.errstate(divide="ignore", invalid="ignore"):
            found = self.value / self.error
        return np.where(np.isnan(found), 0.0, found)


@dataclass(frozen=True, slots=True)
class Crossing:
    """What is known of the crossing and of the function, at places (k,), ascending.

    below : probability that the crossing is below each place, rising from 0 to 1
    middle, spread : mean and standard deviation of the function there, by the smooth models
    jump : part of the weight that the models with a jump have
    """

    at: Floats
    below: Floats
    middle: Floats
    spread: Floats
    jump: float

    def interval(self, confidence: float) -> tuple[float, float]:
        """Where it lies with this probability, with as much on either side."""
        tail = 0.5 * (1.0 - confidence)
        return self.quantile(tail), self.quantile(1.0 - tail)

    def quantile(self, share: float) -> float:
        """The place below which it lies with this probability."""
        return float(np.interp(share, self.below, self.at))

    def spread_at(self, place: float) -> float:
        """How far the function is not known there, one standard deviation."""
        return float(np.interp(place, self.at, self.spread))


def crossing(known: Known, rising: bool) -> Crossing:
    """What the values say of the place where the function rises through zero, or falls.

    Values at three places or more, each with an error above zero.
    """
    sign = 1.0 if rising else -1.0
    scale = float(np.abs(known.value).max()) or 1.0
    unit = Known(known.at, sign * known.value / scale, known.error / scale)
    grid = np.unique(np.concatenate([np.linspace(0.0, 1.0, _COARSE + 1), unit.at]))
    found = _on(grid, unit)
    for _ in range(2):
        low, high = found.interval(1.0 - 2.0 * _CERTAIN)
        more = 0.1 * (high - low)
        fine = np.linspace(max(0.0, low - more), min(1.0, high + more), _FINE)
        found = _on(np.unique(np.concatenate([grid, fine])), unit)
    return Crossing(
        found.at, found.below, sign * scale * found.middle, scale * found.spread, found.jump
    )


def _on(grid: Floats, known: Known) -> Crossing:
    """The crossing of a function that rises, of the size of one."""
    from scipy.optimize import isotonic_regression
    from scipy.special import ndtr

    evidence, means, spreads = _smooth(known, grid)
    jumps = _jumps(known)
    top = max(float(evidence.max()), float(jumps.max(initial=-math.inf)))
    smooth, jumping = np.exp(evidence - top), np.exp(jumps - top)
    total = smooth.sum() + jumping.sum()
    smooth, jumping = smooth / total, jumping / total
    below = smooth @ ndtr(means / spreads)
    passed = (grid - known.at[:-1, None]) / np.diff(known.at)[:, None]
    inside = _AT_THE_ENDS + (1.0 - 2.0 * _AT_THE_ENDS) * passed
    below += jumping @ np.where(passed <= 0.0, 0.0, np.where(passed >= 1.0, 1.0, inside))
    weights = 1.0 / (below * (1.0 - below) + _CERTAIN)
    rising = np.clip(isotonic_regression(below, weights=weights).x, 0.0, 1.0)
    share = smooth / smooth.sum() if smooth.sum() > 0.0 else np.full(smooth.size, 1 / smooth.size)
    middle = share @ means
    spread = np.sqrt(share @ (spreads**2 + (means - middle) ** 2))
    return Crossing(grid, np.asarray(rising), middle, spread, float(jumping.sum()))


def _models(
    smoothness: tuple[float, ...], lengths: tuple[float, ...]
) -> tuple[Floats, Floats, Floats]:
    """Smoothness, length and scale of each model, (m,)."""
    found = np.array([(nu, at, a) for nu in smoothness for at in lengths for a in _SCALES])
    return found[:, 0], found[:, 1], found[:, 2]


def _covariance(models: tuple[Floats, Floats, Floats], a: Floats, b: Floats) -> NDArray[np.float64]:
    """Between places (n,) and (k,) by each model, (m, n, k), eq. 1."""
    smoothness, length, scale = (each[:, None, None] for each in models)
    far = np.sqrt(2.0 * smoothness) * np.abs(a[:, None] - b[None, :]) / length
    polynomial = 1.0 + np.where(smoothness > 1.0, far, 0.0)
    polynomial += np.where(smoothness > 2.0, far**2 / 3.0, 0.0)
    return np.asarray(scale**2 * (polynomial * np.exp(-far) + 1.0))


def _whitened(
    models: tuple[Floats, Floats, Floats], known: Known
) -> tuple[NDArray[np.float64], Floats]:
    """Inverse Cholesky factors (m, n, n), and what each model foretells of each value, (m, n).

    The latter is the logarithm of its probability by the model and the values before it.
    """
    matrix = _covariance(models, known.at, known.at)
    diagonal = np.arange(known.at.size)
    matrix[:, diagonal, diagonal] += known.error**2 + _ROUNDING * models[2][:, None] ** 2
    factor = np.linalg.cholesky(matrix)
    inverse = np.linalg.inv(factor)
    white = inverse @ known.value
    terms = -0.5 * white**2 - np.log(factor[:, diagonal, diagonal]) - 0.5 * math.log(2.0 * math.pi)
    return inverse, np.asarray(terms)


def _smooth(known: Known, grid: Floats) -> tuple[Floats, Floats, Floats]:
    """Logarithm of each model's evidence (m,), and mean and spread of the function (m, k)."""
    models = _models(_SMOOTHNESS, _LENGTHS)
    inverse, terms = _whitened(models, known)
    evidence = terms.sum(axis=1)
    told = evidence > evidence.max() - 12.0  # of the others nothing could be seen
    models = (models[0][told], models[1][told], models[2][told])
    across = inverse[told] @ _covariance(models, known.at, grid)
    white = inverse[told] @ known.value
    means = np.einsum("mnk,mn->mk", across, white)
    left = 2.0 * models[2][:, None] ** 2 - (across**2).sum(axis=1)
    spreads = np.sqrt(np.maximum(left, _ROUNDING * models[2][:, None] ** 2))
    return evidence[told] - math.log(told.size), means, spreads


def _jumps(known: Known) -> Floats:
    """Logarithm of the evidence of a jump in each gap between neighbours, eq. 2.

    A jump counts where it is the crossing: the values beside it lie on their sides of zero.
    """
    models = _models((2.5,), _JUMP_LENGTHS)
    mirrored = Known(1.0 - known.at[::-1], known.value[::-1], known.error[::-1])
    before = np.cumsum(_whitened(models, known)[1], axis=1)[:, :-1]
    after = np.cumsum(_whitened(models, mirrored)[1], axis=1)[:, :-1][:, ::-1]
    deviations = known.deviations
    sides = _log_normal(-deviations[:-1]) + _log_normal(deviations[1:])
    return _log_mean(before) + _log_mean(after) + sides + np.log(np.diff(known.at))


def _log_mean(rows: Floats) -> Floats:
    top = rows.max(axis=0)
    return np.asarray(top + np.log(np.exp(rows - top).mean(axis=0)))


def _log_normal(deviations: Floats) -> Floats:
    """Logarithm of the part of a Gaussian below so many deviations."""
    from scipy.special import log_ndtr

    return np.asarray(log_ndtr(deviations))
