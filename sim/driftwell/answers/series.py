"""The mean of a series recorded in time, with an error that knows its values are alike.

    tau = 1/2 + sum of the autocorrelation up to the first lag beyond WINDOW tau              (1)
    error^2 = variance of B block means / B / (1 - (tau - 1/2) / block length)
              + (scatter of the values times first lag without correlation / n)^2             (2)

Neighbouring values of a slow quantity say almost the same, so the scatter of single values
promises too much. Blocks longer than the memory are nearly independent; the bracket in eq. 2
makes up for what they still share. Few blocks know their own scatter badly: the error is widened
by the factor of the t distribution. The second term is for regular oscillations, whose blocks may
all be alike: where in a period the window begins and ends is chance.

References
----------
H. Flyvbjerg, H. G. Petersen, J. Chem. Phys. 91 (1989) 461 (blocks).
A. D. Sokal, in Functional Integration (Plenum, 1997) 131, sec. 3 (eq. 1).
Both from memory; the bracket of eq. 2 is that of a memory that fades exponentially and its second
term the largest error of a cut sine, own derivations.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

BLOCKS = 12
WINDOW = 5.0
LEAST_INDEPENDENT = 6.0
"""A series with fewer independent values has no error that could be trusted."""
_WIDER = (1.837, 1.321, 1.197, 1.142, 1.111, 1.091, 1.077, 1.067, 1.059, 1.053, 1.048)
"""What holds 68.27 % of the t distribution, for 1 to 11 degrees of freedom."""


@dataclass(frozen=True, slots=True)
class SeriesMean:
    """Mean of a series in time.

    error : one standard deviation; None where the series is too short against its memory
    independent : how many independent values it is worth
    """

    mean: float
    error: float | None
    independent: float


def series_mean(values: Floats) -> SeriesMean:
    """Mean of values (n,) taken evenly in time, and its error."""
    mean = float(values.mean())
    count = values.size
    scatter = float(values.std())
    if scatter <= 1e-14 * abs(mean):
        return SeriesMean(mean, 0.0 if count > 1 else None, float(count))
    correlation = _correlation(values)
    memory = _time_of(correlation)
    independent = count / (2.0 * memory)
    if independent < LEAST_INDEPENDENT:
        return SeriesMean(mean, None, independent)
    blocks = min(BLOCKS, count)
    length = count // blocks
    means = values[count - blocks * length :].reshape(blocks, length).mean(axis=1)
    shared = max(1.0 - (memory - 0.5) / length, 0.5)
    error = math.sqrt(float(means.var(ddof=1)) / blocks / shared) * _WIDER[blocks - 2]
    ends = scatter * int((correlation <= 0.0).argmax()) / count
    return SeriesMean(mean, math.hypot(error, ends), independent)


def correlation_time(values: Floats) -> float:
    """Integrated autocorrelation time in units of the spacing, eq. 1; 1/2 for no memory."""
    return _time_of(_correlation(values))


def _correlation(values: Floats) -> Floats:
    """Autocorrelation (n,) of values that are not all the same."""
    padded = 1 << (2 * values.size - 1).bit_length()
    spectrum = np.abs(np.fft.rfft(values - values.mean(), padded)) ** 2
    covariance = np.fft.irfft(spectrum, padded)[: values.size]
    return np.asarray(covariance / covariance[0])


def _time_of(correlation: Floats) -> float:
    count = correlation.size
    times = 0.5 + np.concatenate([[0.0], np.cumsum(correlation[1:])])
    beyond = np.nonzero(np.arange(count) >= WINDOW * times)[0]
    lag = int(beyond[0]) if beyond.size else count - 1
    # The mean was taken from the same values, which lowers every term of the sum by tau/n.
    return max(0.5, float(times[lag]) * (1.0 + (2 * lag + 1) / count))
