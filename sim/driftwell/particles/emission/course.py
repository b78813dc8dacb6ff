"""How fast charges are born in time: pieces on which the rate is a straight line, and pulses.

Times of births are found by inverting the integral of the rate, exactly on each piece: with rate
r_0 at its beginning and slope s, an amount A beyond its beginning has come after the time

    t = 2 A / (r_0 + sqrt(r_0^2 + 2 s A))                                                   (1)
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.waveform_table import waveform_table
from driftwell.forms.waveforms import (
    AnyWaveform,
    frequency_scale,
    packed_waveform,
    waveform_breaks,
)
from driftwell.kernels.waveform import waveform

Floats = NDArray[np.float64]

_PIECES = 4000
"""Pieces of a waveform that is no straight line, at least."""
_PER_PERIOD = 64
_MOST_PIECES = 400_000


class Course(Protocol):
    """A rate in time: whole amount, births at parts of it, and the rate itself."""

    def whole(self) -> float:
        """The integral of the rate."""

    def times_at(self, parts: Floats) -> Floats:
        """When `parts` (n,), in (0, 1), of the whole have come, s."""

    def rates_at(self, times: Floats) -> Floats:
        """The rate at times (n,), 1/s."""


@dataclass(frozen=True, slots=True)
class Pieces:
    """Straight pieces of a rate.

    time : (k + 1,) s, rising; before, after : (k,) the rate at each piece's beginning and end
    """

    time: Floats
    before: Floats
    after: Floats

    def whole(self) -> float:
        """The integral of the rate."""
        return float(self._reached()[-1])

    def lowest(self) -> float:
        """The least rate."""
        return float(min(self.before.min(initial=0.0), self.after.min(initial=0.0)))

    def times_at(self, parts: Floats) -> Floats:
        """When `parts` of the whole have come, s, eq. (1)."""
        reached = self._reached()
        wanted = parts * reached[-1]
        k = (np.searchsorted(reached, wanted, side="right") - 1).clip(0, len(self.before) - 1)
        length = np.diff(self.time)[k]
        rest = np.maximum(wanted - reached[k], 0.0)
        rate, slope = self.before[k], (self.after[k] - self.before[k]) / length
        root = np.sqrt(np.maximum(rate**2 + 2.0 * slope * rest, 0.0))
        sum_of_both = rate + root
        since = np.divide(2.0 * rest, sum_of_both, out=np.zeros_like(rest), where=sum_of_both > 0.0)
        return np.asarray(self.time[k] + np.minimum(since, length))

    def rates_at(self, times: Floats) -> Floats:
        """The rate at times, 1/s; 0 outside."""
        k = (np.searchsorted(self.time, times, side="right") - 1).clip(0, len(self.before) - 1)
        part = (times - self.time[k]) / np.diff(self.time)[k]
        found = self.before[k] + part * (self.after[k] - self.before[k])
        inside = (times >= self.time[0]) & (times <= self.time[-1])
        return np.where(inside, found, 0.0)

    def _reached(self) -> Floats:
        amounts = 0.5 * (self.before + self.after) * np.diff(self.time)
        return np.concatenate([[0.0], np.cumsum(amounts)])


def pieces_of(value: AnyWaveform, start: float, stop: float) -> Pieces:
    """A waveform between two times as straight pieces; a sine in a great many."""
    marks = [t for t in waveform_breaks(value, stop) if start < t < stop]
    frequency = frequency_scale(value)
    if frequency > 0.0:
        wanted = max(_PIECES, _PER_PERIOD * frequency * (stop - start))
        marks += np.linspace(start, stop, int(min(wanted, _MOST_PIECES)))[1:-1].tolist()
    time = np.unique([start, *marks, stop])
    table = waveform_table([packed_waveform(value)])
    middle = 0.5 * (time[1:] + time[:-1])

    def values(times: Floats) -> Floats:
        return np.array(
            [
                waveform(int(table.kind[0]), table.parameter[0], table.data, t, inside)[0]
                for t, inside in zip(times, middle, strict=True)
            ]
        )

    return Pieces(time, values(time[:-1]), values(time[1:]))


@dataclass(frozen=True, slots=True)
class Bell:
    """A Gaussian rate whose integral is 1, cut at `cut` rms on both sides; middle, rms : s."""

    middle: float
    rms: float
    cut: float

    def whole(self) -> float:
        """The integral of the rate."""
        return 1.0

    def times_at(self, parts: Floats) -> Floats:
        """When `parts` of the whole have come, s."""
        from scipy.special import ndtr, ndtri

        outside = ndtr(-self.cut)
        return np.asarray(self.middle + self.rms * ndtri(outside + parts * (1.0 - 2.0 * outside)))

    def rates_at(self, times: Floats) -> Floats:
        """The rate at times, 1/s."""
        from scipy.special import ndtr

        away = (times - self.middle) / self.rms
        scale = self.rms * np.sqrt(2.0 * np.pi) * (1.0 - 2.0 * ndtr(-self.cut))
        return np.where(np.abs(away) <= self.cut, np.exp(-0.5 * away**2) / scale, 0.0)
