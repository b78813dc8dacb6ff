"""Mean or slope of a series recorded in time, with an error that knows its values are alike.

    tau = 1/2 + sum of the autocorrelation up to the first lag beyond WINDOW tau              (1)
    error^2 = variance of B block means / B / (1 - (tau - 1/2) / block length)
              + (scatter of the values times first lag without correlation / n)^2             (2)

Neighbouring values of a slow quantity say almost the same, so the scatter of single values
promises too much. Blocks longer than the memory are nearly independent; the bracket in eq. 2
makes up for what they still share. Few blocks know their own scatter badly: the error is widened
by the factor of the t distribution. The second term is for regular oscillations, whose blocks may
all be alike: where in a period the window begins and ends is chance.

The slope is that of the straight line of least squares through all values. Its error is that of a
line through the block means, with what the values scatter about their line for the memory,

    error^2 = variance of B block means about the line / sum of (t_b - mean)^2 / bracket of eq. 2
              + (SWING scatter times first lag without correlation / window^2)^2              (3)

References
----------
H. Flyvbjerg, H. G. Petersen, J. Chem. Phys. 91 (1989) 461 (blocks).
A. D. Sokal, in Functional Integration (Plenum, 1997) 131, sec. 3 (eq. 1).
Both from memory; the bracket of eq. 2 is that of a memory that fades exponentially and its second
term the largest error of a cut sine, in eq. 3 the rms of it over all phases; own derivations.
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.sampling import few_independent

Floats = NDArray[np.float64]

BLOCKS = 12
WINDOW = 5.0
SWING = 24.0 / (math.sqrt(2.0) * math.pi)
"""6 A/(omega T^2) of a sine that was cut, with A = sqrt(2) scatter and lag = pi/(2 omega)."""
LEAST_INDEPENDENT = 6.0
"""A series with fewer independent values has no error that could be trusted."""


@dataclass(frozen=True, slots=True)
class SeriesSlope:
    """Slope of a series in time, per second.

    error : one standard deviation; None where the series is too short against its memory
    scatter : rms distance of the values from their line
    independent : how many independent values it is worth
    """

    slope: float
    error: float | None
    scatter: float
    independent: float


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
    error = math.sqrt(float(means.var(ddof=1)) / blocks / shared) * few_independent(blocks - 1)
    ends = scatter * int((correlation <= 0.0).argmax()) / count
    return SeriesMean(mean, math.hypot(error, ends), independent)


def series_slope(time: Floats, values: Floats) -> SeriesSlope:
    """Slope of at least three values (n,) taken evenly in time (n,), s, and its error."""
    count = values.size
    apart = time - time.mean()
    slope = float(apart @ values / (apart @ apart))
    rest = values - values.mean() - slope * apart
    scatter = float(np.sqrt(np.mean(rest**2)))
    if scatter <= 1e-13 * float(np.abs(values).max()):
        return SeriesSlope(slope, 0.0, scatter, float(count))
    correlation = _correlation(rest)
    # The line takes two values out of the scatter: the memory comes out low by twice as much.
    memory = _time_of(correlation) * (1.0 + min(2.0 * _time_of(correlation) / count, 1.0))
    independent = count / (2.0 * memory)
    if independent < LEAST_INDEPENDENT:
        return SeriesSlope(slope, None, scatter, independent)
    blocks = min(BLOCKS, count)
    length = count // blocks
    used = slice(count - blocks * length, None)
    means = rest[used].reshape(blocks, length).mean(axis=1)
    middle = time[used].reshape(blocks, length).mean(axis=1)
    middle = middle - middle.mean()
    means = means - means.mean() - middle * float(middle @ means / (middle @ middle))
    shared = max(1.0 - (memory - 0.5) / length, 0.5)
    variance = float(means @ means) / (blocks - 2) / float(middle @ middle) / shared
    error = math.sqrt(variance) * few_independent(blocks - 2)
    window = float(time[-1] - time[0]) * count / (count - 1)
    lag = int((correlation <= 0.0).argmax()) * window / count
    return SeriesSlope(
        slope, math.hypot(error, SWING * scatter * lag / window**2), scatter, independent
    )


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
