"""A waveform that is noise of a given spectral density, as a sum of many lines.

    w(t) = offset + sum_k a_k cos(omega_k t + phi_k)                                        (1)
    S(f) = S_r (f / f_r)^p between the lowest and the highest frequency                     (2)

S is one-sided: the mean square of w - offset is the integral of S over positive frequencies. The
band is cut into equal parts, one line each, at a frequency drawn evenly within its part of width d;
its cosine and sine amplitudes are Gaussian with the variance S(f_k) d, so that w(t) is Gaussian at
any time. Numbers are drawn from counter-based streams keyed by the scenario's seed and the name of
what varies, so that each field and electrode has its own noise, the same in every run of that seed.

The sum is a known function of time: the drive's work is accounted as that of any other. After a
time of 1/d it begins to repeat itself, so a run must be shorter.

References
----------
S. O. Rice, Bell Syst. Tech. J. 23 (1944) 282, sec. 2.8 (noise as a sum of lines; from memory).
"""

from __future__ import annotations

import hashlib
import math
from typing import Annotated, Generic, Literal, Self, TypeVar

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import ScenarioError
from driftwell.forms.form import Bound, Form, checked, key, refuse
from driftwell.forms.quantities import Count, Frequency, NonNegative, Positive, Real
from driftwell.forms.spelling import spelled
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveform_table import PackedWaveform
from driftwell.kernels import waveform as packed

Q = TypeVar("Q", bound=float)
D = TypeVar("D", bound=float)

MOST_LINES = 100_000
_REACHED = 5.0
"""Times its standard deviation; a Gaussian value exceeds it once in two million."""


class Noise(WaveformForm, Generic[Q, D]):
    """Gaussian noise with a given spectral density in a band, none outside."""

    kind: Literal["noise"] = key("noise of a given spectral density")
    density: NonNegative[D] = key(
        "one-sided spectral density at `reference`: mean square in a band of 1 Hz"
    )
    lowest: Positive[Frequency] = key("lower end of the band", example="100 kHz")
    highest: Positive[Frequency] = key("upper end of the band", example="2 MHz")
    exponent: Real = key(
        "power of the frequency the density goes with: 0 flat, -1 falling as 1/f", default=0.0
    )
    reference: Positive[Frequency] | None = key(
        "frequency at which the density is `density`; left out: `lowest`", default=None
    )
    lines: Annotated[Count, Bound(least=1, most=MOST_LINES)] = key(
        "sine waves the noise is made of: at least the width of the band times the duration",
        default=1000,
    )
    offset: Q = key("constant part added to the noise", default=0.0)

    _drawn_for: tuple[int, str] = (1, "")

    @checked
    def _ordered(self) -> Self:
        if self.highest <= self.lowest:
            raise refuse("`highest` must be above `lowest`")
        return self

    @property
    def spacing(self) -> float:
        """Width of the band over the number of lines, Hz."""
        return (self.highest - self.lowest) / self.lines

    def drawn_for(self, seed: int, name: str) -> Self:
        """The same noise with the lines drawn for this seed and the thing of this name."""
        made = self.model_copy()
        made._drawn_for = (seed, name)
        return made

    def spectral_density(self, frequency: NDArray[np.float64]) -> NDArray[np.float64]:
        """Equation (2) in the band; frequency : any shape, Hz."""
        return np.asarray(
            self.density * (frequency / (self.reference or self.lowest)) ** self.exponent
        )

    def packed(self) -> PackedWaveform:
        seed, name = self._drawn_for
        digest = hashlib.sha256(f"{seed}\0{name}\0noise".encode()).digest()
        stream = np.random.Generator(np.random.Philox(key=int.from_bytes(digest[:16], "little")))
        part = stream.random(self.lines)
        frequency = self.lowest + self.spacing * (np.arange(self.lines) + part)
        size = np.sqrt(self.spectral_density(frequency) * self.spacing)
        cosine, sine = size * stream.standard_normal((2, self.lines))
        rate = 2.0 * math.pi * frequency
        rows = np.stack(
            [rate, np.hypot(cosine, sine), np.arctan2(-sine, cosine), np.zeros_like(rate)]
        )
        points = tuple((float(a), float(b)) for a, b in rows.T.reshape(-1, 2))
        return PackedWaveform(packed.NOISE, (0.0, float(self.lines), self.offset), points)

    def breaks(self, duration: float) -> list[float]:
        """None; but noise that would repeat itself is refused."""
        if duration * self.spacing > 1.0:
            enough = math.ceil(duration * (self.highest - self.lowest) * (1.0 - 1e-12))
            way = (
                f"give it at least {enough} `lines`"
                if enough <= MOST_LINES
                else f"{MOST_LINES} `lines` are the most, so take a narrower band"
            )
            raise ScenarioError(
                f"noise of {self.lines} lines from {spelled(self.lowest, 'Hz')} to "
                f"{spelled(self.highest, 'Hz')} repeats itself after "
                f"{spelled(1.0 / self.spacing, 's', 4)}, before the run ends at "
                f"{spelled(duration, 's')}: {way}"
            )
        return []

    def frequency_scale(self) -> float:
        return self.highest

    def largest(self) -> float:
        return abs(self.offset) + _REACHED * self.root_mean_square()

    def steady(self) -> float:
        return abs(self.offset)

    def root_mean_square(self) -> float:
        """Of the noise without its offset."""
        reference = self.reference or self.lowest
        low, high, power = self.lowest / reference, self.highest / reference, self.exponent + 1.0
        width = (
            math.log(high / low) if power == 0.0 else (high**power - low**power) / power
        ) * reference
        return math.sqrt(self.density * width)

    def words(self, unit: str) -> str:
        offset = f"{spelled(self.offset, unit)} plus " if self.offset else ""
        shape = f" with f^{self.exponent:g}" if self.exponent else ""
        return (
            f"{offset}noise of {spelled(self.root_mean_square(), unit, 4)} rms between "
            f"{spelled(self.lowest, 'Hz')} and {spelled(self.highest, 'Hz')}{shape}"
        )


F = TypeVar("F", bound=Form)


def with_noise_drawn(form: F, seed: int, name: str) -> F:
    """`form` with every noise among its values drawn for this seed and name."""
    drawn = {
        attribute: value.drawn_for(seed, f"{name}\0{attribute}")
        for attribute, value in form
        if isinstance(value, Noise)
    }
    return form.model_copy(update=drawn) if drawn else form
