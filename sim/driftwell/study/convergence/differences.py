"""From the answers of refined runs to errors of the run that was refined.

Along the step h there are three values f_1, f_2, f_3 at h_1 > h_2 > h_3, about halves of each
other, with the differences d_1 = f_2 - f_1 and d_2 = f_3 - f_2. Where the error is C h^p,

    d_1 / d_2 = (h_1^p - h_2^p) / (h_2^p - h_3^p)                                            (1)
    f_0 = f_3 + d_2 h_3^p / (h_2^p - h_3^p),    error of f_1 = |f_1 - f_0|                   (2)

gives the order p and the limit f_0. All runs have the same seed: while refining changes motions but
little, chance cancels from the differences. Where motions part (many bodies, close encounters), it
does not: then each value scatters on its own by c, the error by chance of a single run, and

    noise of a difference = 2^(1/2) c                                                        (3)

Differences of that size say nothing of the order. What can be told then is a bound, from all runs
that scatter alike: D, the mean of the refined ones less the mean of n unrefined ones, has the noise
c (1/m + 1/n)^(1/2), and the error is below the larger of both.                              (4)

References
----------
L. F. Richardson, Phil. Trans. R. Soc. A 226 (1927) 299 (eq. 2); P. J. Roache, J. Fluids Eng. 116
(1994) 405 (the observed order). From memory. The limits between which differences count as noise
are our own; what they cost in false alarms is in docs/numerics/convergence.md.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from statistics import fmean, stdev
from typing import Literal

from scipy.optimize import brentq

from driftwell.answers.sampling import few_independent

Kind = Literal["richardson", "difference", "bound", "unchanged", "scatter", "missing"]

LOUD = 2.0
"""Times the noise of a difference, above which it is no noise."""
PARTED_STEP, PARTED_ONCE = 0.2, 0.05
"""Times that noise, below which motions cannot have parted: of the three differences along the
step, and of a single one."""
CERTAIN = 0.1
"""How close to the scheme's order one must be to be believed amidst the noise."""
LEAST_ORDER = 0.5
ROUNDING = 1e-12
"""Relative differences below this are rounding."""
_LARGEST_ORDER = 12.0


@dataclass(frozen=True, slots=True)
class AxisError:
    """What one axis adds to the error of an answer.

    error : in the answer's unit; not a number where nothing can be told
    kind, how : by which way it was found, as a word and as a sentence
    order : observed; None where it is not clean
    asymptotic : False where differences grow, or change their sign without shrinking
    noise : of the differences, by chance; 0 where there is none, or none is known
    differences : of the values along the axis
    limit : what Richardson's extrapolation leads to; not a number without one
    """

    error: float
    kind: Kind
    how: str
    order: float | None = None
    asymptotic: bool = True
    noise: float = 0.0
    differences: tuple[float, ...] = ()
    limit: float = math.nan


def error_of_step(
    values: Sequence[float],
    lengths: Sequence[float],
    scheme_order: float,
    chance: float,
    replicas: Sequence[float],
    more: Sequence[float] = (),
) -> AxisError:
    """The error of ``values[0]`` by its step.

    values, lengths : of three runs, from the longest step to the shortest; s
    chance : error by chance of a single run; 0 where none is known
    replicas : values of unrefined runs that scatter by chance, ``values[0]`` among them
    more : values of refined runs of other seeds
    """
    first, second, third = values
    d = (second - first, third - second)
    largest = max(abs(d[0]), abs(d[1]), abs(third - first))
    noise = math.sqrt(2.0) * chance
    if largest <= ROUNDING * max(map(abs, values)):
        return _unchanged(noise, d)
    order = observed_order(d, lengths)
    if order is not None and LEAST_ORDER <= order <= scheme_order + 1.0:
        together = largest < PARTED_STEP * noise
        loud = min(abs(d[0]), abs(d[1])) > LOUD * noise
        if together or loud or abs(order - scheme_order) <= CERTAIN:
            powers = [length**order for length in lengths]
            limit = third + d[1] * powers[2] / (powers[1] - powers[2])
            error = abs(first - limit)
            return AxisError(error, "richardson", "Richardson", order, True, noise, d, limit)
    if PARTED_STEP * noise <= largest <= LOUD * noise:
        return _bound((second, third, *more), replicas, chance, d)
    grows = abs(d[1]) > abs(d[0]) * 2.0**-LEAST_ORDER
    words = "difference; it does not shrink with the step" if grows else "difference"
    return AxisError(largest, "difference", words, None, not grows, noise, d)


def observed_order(differences: Sequence[float], lengths: Sequence[float]) -> float | None:
    """The order p of eq. 1; None where differences are not of one sign, or fit no order."""
    d1, d2 = differences
    if d1 * d2 <= 0.0:
        return None
    h1, h2, h3 = (length / lengths[0] for length in lengths)

    def excess(p: float) -> float:
        return math.log((h1**p - h2**p) / (h2**p - h3**p)) - math.log(d1 / d2)

    if not h1 > h2 > h3 or excess(1e-3) > 0.0 or excess(_LARGEST_ORDER) < 0.0:
        return None
    return float(brentq(excess, 1e-3, _LARGEST_ORDER, xtol=1e-10))


def error_of_one(
    base: float,
    refined: float,
    chance: float,
    replicas: Sequence[float],
    words: str,
    more: Sequence[float] = (),
) -> AxisError:
    """The error of `base` where one run has an approximation refined until it hardly matters.

    words : how the difference is told; the other arguments as for the step
    """
    difference = refined - base
    noise = math.sqrt(2.0) * chance
    size = abs(difference)
    if size <= ROUNDING * max(abs(base), abs(refined)):
        return _unchanged(noise, (difference,))
    if PARTED_ONCE * noise <= size <= LOUD * noise:
        return _bound((refined, *more), replicas, chance, (difference,))
    return AxisError(size, "difference", words, None, True, noise, (difference,))


def error_of_weight(
    base: Sequence[float], finer: Sequence[float], chance: tuple[float, float], left: float
) -> AxisError:
    """The error of a run by the weight of its charges.

    base, finer : values of runs of several seeds, with the weight as it is and a smaller one
    chance : error by chance of a single run, of each kind
    left : the smaller weight over the larger one; 0 where the smaller one is that of real charges

    Other charges are drawn where there are more of them, so the difference holds the noise of both.
    What is above it is taken as of order 1 in the weight.
    """
    difference = fmean(finer) - fmean(base)
    noise = math.hypot(chance[0] / math.sqrt(len(base)), chance[1] / math.sqrt(len(finer)))
    size = abs(difference)
    whole = size / (1.0 - left)
    if size <= ROUNDING * max(map(abs, (*base, *finer))):
        return _unchanged(noise, (difference,))
    if size > LOUD * noise:
        words = "difference" if left == 0.0 else "difference, carried on as of order 1"
        return AxisError(whole, "difference", words, None, True, noise, (difference,))
    bound = max(size, noise)
    return AxisError(bound, "bound", _below(bound), None, True, noise, (difference,))


def error_of_chance(values: Sequence[float]) -> AxisError:
    """How far a single run scatters, from runs that differ in their seed only.

    The scatter of few values is itself uncertain: it is widened to what holds 68 % all the same.
    """
    scatter = stdev(values)
    error = scatter * few_independent(len(values) - 1)
    words = f"scatter of {len(values)} seeds" if scatter > 0.0 else "unchanged"
    return AxisError(error, "scatter" if scatter > 0.0 else "unchanged", words, limit=fmean(values))


def nothing_told(answered: int, runs: int) -> AxisError:
    """Where not all runs of an axis have a value."""
    return AxisError(math.nan, "missing", f"only {answered} of {runs} runs have a value")


def _unchanged(noise: float, differences: tuple[float, ...]) -> AxisError:
    """What rounding alone tells apart, which is no error of the axis."""
    return AxisError(0.0, "unchanged", "unchanged", None, True, noise, differences)


def _bound(
    refined: Sequence[float],
    replicas: Sequence[float],
    chance: float,
    differences: tuple[float, ...],
) -> AxisError:
    """What eq. 4 says."""
    noise = chance * math.sqrt(1.0 / len(refined) + 1.0 / len(replicas))
    bound = max(abs(fmean(refined) - fmean(replicas)), noise)
    return AxisError(
        bound, "bound", _below(bound), None, True, math.sqrt(2.0) * chance, differences
    )


def _below(bound: float) -> str:
    return f"below the noise: < {bound:.2g}"
