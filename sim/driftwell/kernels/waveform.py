"""Values in time: evaluation of packed waveforms and of their time derivative.

A waveform is smooth between its breaks. At a break the value may jump, so the caller names the
piece it means by a second time `inside`, which lies in the interior of the step's own interval:
the closing kick before a jump and the opening kick after it then take their own side, with no
comparison of nearly equal floats.

Packed layout, one row of parameters for each waveform:

========= ====== ==========================================================
kind      number parameters
========= ====== ==========================================================
constant  0      value
sine      1      offset, amplitude, angular frequency (rad/s), phase (rad)
ramp      2      value before, value after, start, end (s)
pulses    3      low, high, start, width, period (0: one), rise, count
table     4      first index, number of points in the data array
noise     5      first index, number of lines, offset; a line takes two rows of
                 the data array: angular frequency and amplitude, phase and 0
========= ====== ==========================================================
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.kernels.compiled import inlined_kernel, inner_kernel, outer_kernel

CONSTANT = 0
SINE = 1
RAMP = 2
PULSES = 3
TABLE = 4
NOISE = 5
PARAMETERS = 8


@inlined_kernel
def waveform(
    kind: int, parameter: np.ndarray, data: np.ndarray, t: float, inside: float
) -> tuple[float, float]:
    """Value and rate (1/s) at time `t`, on the smooth piece that holds the time `inside`.

    Parameters
    ----------
    kind : int
    parameter : (8,) float64
    data : (m, 2) float64
        Times and values of all tables, lines of all noise.
    """
    if kind == CONSTANT:
        return parameter[0], 0.0
    if kind == SINE:
        angle = parameter[2] * t + parameter[3]
        return (
            parameter[0] + parameter[1] * math.cos(angle),
            -parameter[1] * parameter[2] * math.sin(angle),
        )
    if kind == RAMP:
        return _ramp(parameter[0], parameter[1], parameter[2], parameter[3], t, inside)
    if kind == PULSES:
        return _pulses(parameter, t, inside)
    if kind == NOISE:
        return _noise(data, int(parameter[0]), int(parameter[1]), parameter[2], t)
    return _table(data, int(parameter[0]), int(parameter[1]), t, inside)


@outer_kernel
def _noise(
    data: np.ndarray, first: int, lines: int, offset: float, t: float
) -> tuple[float, float]:
    """The sum of all lines, amplitude cos(omega t + phase)."""
    value, rate = 0.0, 0.0
    for k in range(first, first + 2 * lines, 2):
        angle = data[k, 0] * t + data[k + 1, 0]
        value += data[k, 1] * math.cos(angle)
        rate -= data[k, 1] * data[k, 0] * math.sin(angle)
    return offset + value, rate


@inner_kernel
def _ramp(
    before: float, after: float, start: float, end: float, t: float, inside: float
) -> tuple[float, float]:
    """Straight line from one level to another; a step where `end` equals `start`."""
    if inside <= start:
        return before, 0.0
    if inside >= end:
        return after, 0.0
    slope = (after - before) / (end - start)
    return before + slope * (t - start), slope


@inner_kernel
def _pulses(parameter: np.ndarray, t: float, inside: float) -> tuple[float, float]:
    """Trapezoidal pulses: up over `rise`, high until `width`, down over `rise`."""
    low, high, start, width = parameter[0], parameter[1], parameter[2], parameter[3]
    period, rise, count = parameter[4], parameter[5], parameter[6]
    since = inside - start
    if since <= 0.0:
        return low, 0.0
    number = 0.0
    if period > 0.0:
        number = math.floor(since / period)
        if count > 0.0 and number >= count:
            return low, 0.0
    begin = start + number * period
    if inside < begin + width:
        return _ramp(low, high, begin, begin + rise, t, inside)
    return _ramp(high, low, begin + width, begin + width + rise, t, inside)


@inner_kernel
def _table(
    data: np.ndarray, first: int, points: int, t: float, inside: float
) -> tuple[float, float]:
    """Straight lines between tabulated points; constant before the first and after the last."""
    last = first + points - 1
    if inside <= data[first, 0]:
        return data[first, 1], 0.0
    if inside >= data[last, 0]:
        return data[last, 1], 0.0
    low, high = first, last
    while high - low > 1:
        middle = (low + high) // 2
        if data[middle, 0] <= inside:
            low = middle
        else:
            high = middle
    slope = (data[high, 1] - data[low, 1]) / (data[high, 0] - data[low, 0])
    return data[low, 1] + slope * (t - data[low, 0]), slope
