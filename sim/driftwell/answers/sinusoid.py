"""Lines in an evenly sampled record: frequency far below a bin, and how well it is known.

    value(t) = c0 + c1 t + sum over lines of a cos(w t) + b sin(w t)                          (1)

Lines are taken one after the other, the strongest first: the highest point of the spectrum of what
is left (Hann window, zero-padded) gives a start value through a parabola in its logarithm, then
all lines found so far are fitted together by least squares (Gauss-Newton in eq. 1). It ends when
nothing stands above the noise. Lines one bin (one over the record's length) apart are told apart in
a quiet record. Lines closer than half a bin are taken for one, which may then lie half a bin off
with an error that knows little of it: run longer.

The error comes from the fit's covariance, with the noise taken from what is left around the line:
motion that is not a steady sine (a frequency that wanders, lines too close to tell apart) leaves a
residue just there and widens the error.

    error(f)^2 about 6 s^2 / (pi^2 A^2 n T^2)  for white noise s, amplitude A, n samples in T  (2)

References
----------
D. C. Rife, R. R. Boorstyn, IEEE Trans. Inf. Theory 20 (1974) 591 (eq. 2: the least any estimate
can have; from memory).
F. J. Harris, Proc. IEEE 66 (1978) 51 (window; from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import AnswerError
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

LINES = 12
LEAST_SAMPLES = 16
LEAST_PERIODS = 2.0
_PADDED = 4
_QUIET = 1e-11
"""A line so much weaker than the strongest is rounding."""
_ABOVE_NOISE = 7.0
_SETTLED = 1e-9
"""A change of so many bins was the last: the next is about its square."""
_LOCAL = 25
_SLICE = 1 << 16


@dataclass(frozen=True, slots=True)
class Line:
    """One line: frequency and its error in Hz, amplitude in the unit of the record."""

    frequency: float
    error: float
    amplitude: float


@dataclass(frozen=True, slots=True)
class _Samples:
    """Times scaled to -1...1 and values scaled to at most 1, (n,); one bin as a scaled rate."""

    time: Floats
    value: Floats
    bin_rate: float

    def parts(self) -> list[slice]:
        """Stretches of the samples that are worked on at a time, to bound the memory taken."""
        return [slice(k, k + _SLICE) for k in range(0, self.time.size, _SLICE)]


@dataclass(frozen=True, slots=True)
class _Fit:
    """Eq. 1 at its best for some rates.

    rate : (m,) of the lines
    linear : c0, c1, then a, b of each line
    rest : (n,) what it leaves of the values
    """

    rate: Floats
    linear: Floats
    rest: Floats

    @property
    def left(self) -> float:
        """Sum of squares left."""
        return float(np.sum(self.rest**2))


def lines_in(time: Floats, value: Floats) -> list[Line]:
    """Lines in evenly spaced samples (n,), the strongest first.

    Raises AnswerError where there are too few samples or nothing stands above the noise.
    """
    count = time.size
    if count < LEAST_SAMPLES:
        raise AnswerError(f"needs at least {LEAST_SAMPLES} samples, there are {count}")
    spacing = (time[-1] - time[0]) / (count - 1)
    if float(np.max(np.abs(np.diff(time) - spacing))) > 0.01 * spacing:
        raise AnswerError("the samples are not evenly spaced in time")
    half = 0.5 * (time[-1] - time[0])
    scaled = (time - 0.5 * (time[0] + time[-1])) / half
    bin_rate = 2.0 * math.pi / (count * spacing) * half
    moved = value - value.mean()
    scale = float(np.max(np.abs(moved)))
    rounding = float(np.finfo(float).eps * np.max(np.abs(value)))
    if scale <= 100.0 * rounding:
        raise AnswerError("it does not move")
    samples = _Samples(scaled, moved / scale, bin_rate)
    fit = _fitted(samples, rounding / scale)
    if fit.rate.size == 0:
        raise AnswerError("nothing in it stands above the noise")
    errors = _rate_errors(samples, fit)
    amplitude = scale * np.hypot(fit.linear[2::2], fit.linear[3::2])
    found = [
        Line(
            float(rate / half / (2.0 * math.pi)),
            # Below four roundings the error is that of the arithmetic.
            float(max(error, 4.0 * np.finfo(float).eps * rate) / half / (2.0 * math.pi)),
            float(strength),
        )
        for rate, error, strength in zip(fit.rate, errors, amplitude, strict=True)
    ]
    return sorted(found, key=lambda line: -line.amplitude)


def other_line(lines: list[Line], line: Line) -> str:
    """For a note: the strongest line besides the one that was taken; empty without another."""
    for other in lines:
        if other is not line:
            ratio = other.amplitude / line.amplitude
            times = f"{ratio:.0f}" if ratio >= 10.0 else f"{ratio:.2g}"
            where = spelled(other.frequency, "Hz", 4)
            return f"; strongest other line at {where}, {times} times as large"
    return ""


def chosen_line(
    lines: list[Line], near: float | None, length: float, reach: float | None = None
) -> Line:
    """The strongest line, or the strongest near a frequency.

    lines : by their strength; near : Hz, or None for the strongest of all
    length : s, of the record; reach : Hz on either side; None: a tenth of `near`, or two bins

    Raises AnswerError where there is none, or the record of `length` (s) is too short for it.
    """
    if near is not None:
        reach = reach or max(0.1 * near, 2.0 / length)
        found = lines
        lines = [line for line in lines if abs(line.frequency - near) <= reach]
        if not lines:
            strongest = ", ".join(spelled(line.frequency, "Hz") for line in found[:3])
            raise AnswerError(
                f"no line within {spelled(reach, 'Hz', 3)} of {spelled(near, 'Hz')}; "
                f"the strongest are at {strongest}"
            )
    line = lines[0]
    if line.frequency * length < LEAST_PERIODS:
        raise AnswerError(
            f"the record of {spelled(length, 's', 3)} holds fewer than {LEAST_PERIODS:g} periods; "
            "run longer"
        )
    return line


def _fitted(samples: _Samples, rounding: float) -> _Fit:
    """All lines above the noise and the rounding of the values, fitted together."""
    near = 0.5 * samples.bin_rate
    fit = _at(samples, np.empty(0))
    quiet = rounding
    for _ in range(LINES):
        start = _next_line(fit.rest, samples.bin_rate, quiet)
        if start is None or np.any(np.abs(fit.rate - start) < near):
            break
        more = _refined(samples, _at(samples, np.append(fit.rate, start)), rounds=4)
        amplitude = np.hypot(more.linear[2::2], more.linear[3::2])
        together = np.any(np.diff(np.sort(more.rate)) < near)
        if together or amplitude.max() > 10.0 or more.rate.min() <= 0.0:
            break
        fit = more
        quiet = max(rounding, _QUIET * float(amplitude.max()))
    return _refined(samples, fit, rounds=40)


def _spectrum(value: Floats) -> tuple[Floats, int]:
    """Power of the windowed values on a padded grid, and the length of that grid."""
    from scipy.fft import next_fast_len

    count = value.size
    window = 0.5 - 0.5 * np.cos(2.0 * math.pi * (np.arange(count) + 0.5) / count)
    length = int(next_fast_len(_PADDED * count, real=True))
    return np.asarray(np.abs(np.fft.rfft(value * window, length)) ** 2), length


def _next_line(rest: Floats, bin_rate: float, quiet: float) -> float | None:
    """Scaled rate of the strongest line in what is left; None where it is noise or quieter."""
    count = rest.size
    power, length = _spectrum(rest)
    # Below one bin a line cannot be told from the straight line in eq. 1.
    first = math.ceil(length / count)
    body = power[first : power.size - 1]
    peak = first + int(body.argmax())
    # The median of an exponential distribution is ln 2 of its mean.
    noise = float(np.median(body)) / math.log(2.0)
    if power[peak] <= (math.log(count / 2.0) + _ABOVE_NOISE) * noise:
        return None
    if 4.0 * math.sqrt(power[peak]) / count <= quiet:  # its amplitude
        return None
    low, middle, high = np.log(np.maximum(power[peak - 1 : peak + 2], 1e-300))
    bend = low - 2.0 * middle + high
    shift = 0.5 * (low - high) / bend if bend < 0.0 else 0.0
    return float((peak + min(max(shift, -1.0), 1.0)) * count / length * bin_rate)


def _refined(samples: _Samples, fit: _Fit, rounds: int) -> _Fit:
    """Gauss-Newton on all unknowns of eq. 1; a step that does not help is halved."""
    if fit.rate.size == 0:
        return fit
    for _ in range(rounds):
        by = _step(samples, fit)[0]
        size = min(1.0, 0.5 * samples.bin_rate / max(float(np.max(np.abs(by))), 1e-300))
        for _ in range(5):
            tried = _at(samples, fit.rate + size * by)
            if tried.left <= fit.left:
                break
            size *= 0.5
        else:
            return fit
        fit = tried
        if np.all(np.abs(size * by) <= _SETTLED * samples.bin_rate):
            break
    return fit


def _columns(time: Floats, rate: Floats) -> Floats:
    """Derivatives of eq. 1 by c0, c1 and (a, b) of each line: (2 + 2 m, n)."""
    columns = np.empty((2 + 2 * rate.size, time.size))
    columns[0], columns[1] = 1.0, time
    angle = rate[:, None] * time
    np.cos(angle, out=columns[2::2])
    np.sin(angle, out=columns[3::2])
    return columns


def _at(samples: _Samples, rate: Floats) -> _Fit:
    """Best c0, c1, a, b at the given rates."""
    size = 2 + 2 * rate.size
    square, right = np.zeros((size, size)), np.zeros(size)
    parts = samples.parts()
    for part in parts:
        columns = _columns(samples.time[part], rate)
        square += columns @ columns.T
        right += columns @ samples.value[part]
    linear: Floats = np.asarray(np.linalg.lstsq(square, right, rcond=None)[0], dtype=np.float64)
    rest = samples.value.copy()
    for part in parts:
        if len(parts) > 1:
            columns = _columns(samples.time[part], rate)
        rest[part] -= linear @ columns
    return _Fit(rate, linear, rest)


def _step(samples: _Samples, fit: _Fit) -> tuple[Floats, Floats]:
    """Change of the rates, and its variances (m,) for noise of variance one."""
    lines = fit.rate.size
    a, b = fit.linear[2::2, None], fit.linear[3::2, None]
    square = np.zeros((2 + 3 * lines, 2 + 3 * lines))
    right = np.zeros(2 + 3 * lines)
    for part in samples.parts():
        columns = _columns(samples.time[part], fit.rate)
        by_rate = samples.time[part] * (b * columns[2::2] - a * columns[3::2])
        columns = np.concatenate([columns, by_rate])
        square += columns @ columns.T
        right += columns @ fit.rest[part]
    size = np.sqrt(np.maximum(np.diag(square), 1e-300))
    inverse = np.linalg.pinv(square / np.outer(size, size), rcond=1e-13) / np.outer(size, size)
    return (inverse @ right)[2 + 2 * lines :], np.diag(inverse)[2 + 2 * lines :]


def _rate_errors(samples: _Samples, fit: _Fit) -> Floats:
    """Standard deviation of each rate, from the noise left in the bins around its line."""
    variance = np.maximum(_step(samples, fit)[1], 0.0)
    power = np.abs(np.fft.rfft(fit.rest)) ** 2 / fit.rest.size
    inner = power[1:-1]
    place = fit.rate / samples.bin_rate - 1.0
    noise = []
    for line in place:
        low = max(0, math.floor(line) - _LOCAL)
        around = inner[low : math.ceil(line) + _LOCAL + 1]
        # Each line takes its own three unknowns out of the bins it lies in: 1.5 bins' worth.
        taken = 1.5 * np.sum((place >= low) & (place <= low + around.size))
        noise.append(float(around.sum()) / max(around.size - taken, 1.0))
    return np.asarray(np.sqrt(variance * np.array(noise)))
