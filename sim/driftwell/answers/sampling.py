"""Sampling errors: how far an answer would differ had other charges been drawn.

Every error is one standard deviation. Charges count as drawn independently of each other; where
their mutual repulsion has ordered them, the true scatter is smaller than said.

    fraction    half the width of Wilson's interval, which is not zero for none or all        (1)
    mean        s / sqrt(n)                                                                   (2)
    any other   jackknife: each of G groups is left out in turn,
                error^2 = (G - 1)/G sum of (value without g - mean of these)^2                (3)
    quantile    a quarter of q(p + 2 d) - q(p - 2 d), with d^2 = p (1 - p)/n                  (4)

References
----------
E. B. Wilson, J. Am. Stat. Assoc. 22 (1927) 209 (eq. 1).
H. A. David, H. N. Nagaraja, Order Statistics, 3rd ed. (2003), sec. 7.1 (eq. 4).
B. Efron, The Jackknife, the Bootstrap and Other Resampling Plans (SIAM, 1982), ch. 3 (eq. 3).
G. L. Steele, D. Lea, C. H. Flood, OOPSLA (2014) 453 (the numbers that shuffle the groups).
All from memory.
"""

from __future__ import annotations

import math
from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Bools = NDArray[np.bool_]

GROUPS = 50
"""Most groups of the jackknife; the error itself is then good to 10 %."""
_WIDER = (1.837, 1.321, 1.197, 1.142, 1.111, 1.091, 1.077, 1.067, 1.059, 1.053, 1.048)
"""What holds 68.27 % of the t distribution, for 1 to 11 degrees of freedom."""


def wilson_interval(hits: float, trials: float, deviations: float = 1.0) -> tuple[float, float]:
    """Bounds of a fraction seen as `hits` of `trials`, so many standard deviations wide, eq. 1."""
    share = hits / trials
    square = deviations**2 / trials
    middle = (share + square / 2.0) / (1.0 + square)
    half = math.sqrt(square * share * (1.0 - share) + square**2 / 4.0) / (1.0 + square)
    return max(0.0, middle - half), min(1.0, middle + half)


def fraction_error(hits: float, trials: float) -> float:
    """Half the width of Wilson's interval of one standard deviation."""
    low, high = wilson_interval(hits, trials)
    return (high - low) / 2.0


def mean_error(values: Floats) -> float | None:
    """Standard error of the mean of independent values, eq. 2; None for a single one."""
    if values.size < 2:
        return None
    return float(values.std(ddof=1) / math.sqrt(values.size))


def few_independent(degrees: int) -> float:
    """By how much an error is too small that was itself found from few values.

    What holds 68.27 % of the t distribution of so many degrees of freedom, in standard deviations
    of the Gaussian.
    """
    return _WIDER[degrees - 1] if degrees <= len(_WIDER) else 1.0 + 0.53 / degrees


def quantile_error(values: Floats, share: float) -> float | None:
    """Error of the value below which `share` of independent values lie, eq. 4; None for few."""
    if values.size < 10:
        return None
    reach = 2.0 * math.sqrt(share * (1.0 - share) / values.size)
    low, high = np.quantile(values, [max(share - reach, 0.0), min(share + reach, 1.0)])
    return float(high - low) / 4.0


def group_of(count: int, groups: int = GROUPS) -> NDArray[np.int64]:
    """The group of each of `count` charges in the order of their ids: shuffled, then dealt out.

    Dealing keeps the groups equally large whatever was lost. The shuffle is always the same one;
    it keeps an order the charges were laid out in (along a line, turn and turn about) from making
    the groups alike or unlike.
    """
    mixed = np.arange(1, count + 1, dtype=np.uint64) * np.uint64(0x9E3779B97F4A7C15)
    for shift, factor in ((30, 0xBF58476D1CE4E5B9), (27, 0x94D049BB133111EB)):
        mixed = (mixed ^ (mixed >> np.uint64(shift))) * np.uint64(factor)
    mixed ^= mixed >> np.uint64(31)
    group = np.empty(count, dtype=np.int64)
    group[np.argsort(mixed, kind="stable")] = np.arange(count) % min(groups, max(count, 1))
    return group


def jackknife_error(
    value: Callable[[Bools], float], count: int, groups: int = GROUPS
) -> float | None:
    """Error of any smooth value, from its changes as groups of charges are left out, eq. 3.

    Parameters
    ----------
    value : the value from the charges where its argument, (count,), is true
    count : number of charges
    groups : how many groups; each charge is its own where there are fewer charges

    Returns None where a value without one group is not a number: too few charges.
    """
    group = group_of(count, groups)
    used = int(group.max(initial=0)) + 1
    if used < 3:
        return None
    without = np.array([value(group != g) for g in range(used)])
    error = math.sqrt((used - 1) / used * float(np.sum((without - without.mean()) ** 2)))
    return error if math.isfinite(error) else None
