"""Waveforms as a scenario declares them.

Any voltage, current or field strength may be a plain quantity (constant) or a table such as
``{ amplitude = "180 V", frequency = "1.1 MHz" }``.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Annotated, Any, Generic, Literal, Self, TypeVar, Union

import numpy as np
from numpy.typing import ArrayLike
from pydantic import Discriminator, Tag

from driftwell.errors import ScenarioError
from driftwell.forms.form import checked, key, refuse
from driftwell.forms.noise import Noise
from driftwell.forms.quantities import (
    Angle,
    Count,
    Current,
    CurrentNoise,
    ElectricField,
    ElectricFieldNoise,
    FieldGradient,
    FieldGradientNoise,
    Frequency,
    MagneticField,
    MagneticFieldNoise,
    MagneticGradient,
    MagneticGradientNoise,
    NonNegative,
    Positive,
    Real,
    RealNoise,
    Time,
    Voltage,
    VoltageNoise,
)
from driftwell.forms.spelling import spelled
from driftwell.forms.waveform_form import WaveformForm
from driftwell.forms.waveform_table import PackedWaveform
from driftwell.kernels import waveform as packed

Q = TypeVar("Q", bound=float)

_MOST_EDGES = 4_000_000


class Sine(WaveformForm, Generic[Q]):
    """offset + amplitude * cos(2 pi frequency t + phase)."""

    kind: Literal["sine"] = key("sine wave; may be left out", default="sine")
    amplitude: Q = key("amplitude, zero to peak")
    frequency: Positive[Frequency] = key("frequency", example="1.1 MHz")
    offset: Q = key("constant part added to the oscillation", default=0.0)
    phase: Angle = key("phase at time zero; 0 deg starts at the crest", default=0.0)

    def packed(self) -> PackedWaveform:
        rate = 2.0 * math.pi * self.frequency
        return PackedWaveform(packed.SINE, (self.offset, self.amplitude, rate, self.phase))

    def frequency_scale(self) -> float:
        return self.frequency

    def largest(self) -> float:
        return abs(self.offset) + abs(self.amplitude)

    def steady(self) -> float:
        return abs(self.offset)

    def words(self, unit: str) -> str:
        offset = f"{spelled(self.offset, unit)} plus " if self.offset else ""
        phase = f" from phase {math.degrees(self.phase):.6g} deg" if self.phase else ""
        amplitude = f"{spelled(self.amplitude, unit)} amplitude"
        return f"{offset}{amplitude} at {spelled(self.frequency, 'Hz')}{phase}"


class Ramp(WaveformForm, Generic[Q]):
    """A straight line from one level to another; constant before and after."""

    kind: Literal["ramp"] = key("straight ramp between two levels")
    before: Q = key("level until `start`")
    after: Q = key("level from `end` on")
    start: NonNegative[Time] = key("when the ramp begins")
    end: Positive[Time] = key("when the ramp ends")

    @checked
    def _ordered(self) -> Self:
        if self.end <= self.start:
            raise refuse("`end` must be later than `start`")
        return self

    def packed(self) -> PackedWaveform:
        return PackedWaveform(packed.RAMP, (self.before, self.after, self.start, self.end))

    def breaks(self, duration: float) -> list[float]:
        return _within([self.start, self.end], duration)

    def largest(self) -> float:
        return max(abs(self.before), abs(self.after))

    def words(self, unit: str) -> str:
        return (
            f"ramp from {spelled(self.before, unit)} at {spelled(self.start, 's')} "
            f"to {spelled(self.after, unit)} at {spelled(self.end, 's')}"
        )


class Step(WaveformForm, Generic[Q]):
    """A sudden change of level; steps of the motion end exactly on it."""

    kind: Literal["step"] = key("sudden change of level")
    before: Q = key("level before the change")
    after: Q = key("level after the change")
    at: NonNegative[Time] = key("when the level changes")

    def packed(self) -> PackedWaveform:
        return PackedWaveform(packed.RAMP, (self.before, self.after, self.at, self.at))

    def breaks(self, duration: float) -> list[float]:
        return _within([self.at], duration)

    def largest(self) -> float:
        return max(abs(self.before), abs(self.after))

    def words(self, unit: str) -> str:
        return (
            f"{spelled(self.before, unit)}, from {spelled(self.at, 's')} on "
            f"{spelled(self.after, unit)}"
        )


class Pulses(WaveformForm, Generic[Q]):
    """One pulse, or a train of them, with straight edges."""

    kind: Literal["pulses"] = key("one pulse or a train of pulses")
    low: Q = key("level between pulses")
    high: Q = key("level of a pulse")
    start: NonNegative[Time] = key("when the first pulse begins to rise")
    width: Positive[Time] = key("from the beginning of the rise to the beginning of the fall")
    rise: NonNegative[Time] = key("duration of each edge", default=0.0)
    period: Positive[Time] | None = key(
        "time from pulse to pulse; left out: one pulse", default=None
    )
    count: Positive[Count] | None = key("number of pulses; left out: no end", default=None)

    @checked
    def _ordered(self) -> Self:
        if self.rise > self.width:
            raise refuse("`rise` must not be longer than `width`")
        if self.period is not None and self.width + self.rise > self.period:
            raise refuse("`period` must be at least `width` and `rise` together")
        if self.count is not None and self.period is None:
            raise refuse("`count` needs a `period`")
        return self

    def packed(self) -> PackedWaveform:
        return PackedWaveform(
            packed.PULSES,
            (
                self.low,
                self.high,
                self.start,
                self.width,
                self.period or 0.0,
                self.rise,
                float(self.count or 0),
            ),
        )

    def breaks(self, duration: float) -> list[float]:
        number = 1
        if self.period is not None:
            number = max(0, math.ceil((duration - self.start) / self.period))
            number = min(number, self.count) if self.count is not None else number
        if 4 * number > _MOST_EDGES:
            raise ScenarioError(
                f"a train of {number} pulses in {spelled(duration, 's')} has more edges than "
                f"{_MOST_EDGES}: take a longer `period`, a smaller `count` or a sine wave"
            )
        begins = self.start + np.arange(number) * (self.period or 0.0)
        edges = [0.0, self.rise, self.width, self.width + self.rise]
        return _within(np.add.outer(begins, edges), duration)

    def largest(self) -> float:
        return max(abs(self.low), abs(self.high))

    def words(self, unit: str) -> str:
        low, high = spelled(self.low, unit), spelled(self.high, unit)
        width, start = spelled(self.width, "s"), spelled(self.start, "s")
        edges = f" with edges of {spelled(self.rise, 's')}" if self.rise else ""
        if self.period is None:
            return f"{low} with one pulse to {high} for {width}{edges}, at {start}"
        number = f"{self.count} pulses" if self.count is not None else "pulses"
        every = spelled(self.period, "s")
        return f"{low} with {number} to {high} for {width}{edges}, every {every} from {start} on"


class Table(WaveformForm, Generic[Q]):
    """Straight lines between given points; constant before the first and after the last."""

    kind: Literal["table"] = key("points joined by straight lines")
    times: tuple[Time, ...] = key("times of the points, rising")
    values: tuple[Q, ...] = key("values at those times")

    @checked
    def _ordered(self) -> Self:
        if len(self.times) != len(self.values) or len(self.times) < 2:
            raise refuse("`times` and `values` must hold the same number of points, at least 2")
        if any(b <= a for a, b in zip(self.times, self.times[1:], strict=False)):
            raise refuse("`times` must rise from point to point")
        return self

    def packed(self) -> PackedWaveform:
        points = tuple(zip(self.times, self.values, strict=True))
        return PackedWaveform(packed.TABLE, (), points)

    def breaks(self, duration: float) -> list[float]:
        return _within(self.times, duration)

    def largest(self) -> float:
        return max(abs(value) for value in self.values)

    def words(self, unit: str) -> str:
        return (
            f"{spelled(min(self.values), unit)} to {spelled(max(self.values), unit)} "
            f"in {len(self.times)} points from {spelled(self.times[0], 's')} "
            f"to {spelled(self.times[-1], 's')}"
        )


def _within(times: ArrayLike, duration: float) -> list[float]:
    """The different times between 0 and `duration`, rising."""
    rising = np.unique(np.asarray(times, dtype=np.float64))
    return [float(t) for t in rising[(rising > 0.0) & (rising < duration)]]


def _kind_of(value: Any) -> str:
    """Which kind a raw value means: a string is constant, a table without `kind` a sine."""
    if isinstance(value, WaveformForm):
        return str(getattr(value, "kind", ""))
    if isinstance(value, dict):
        return str(value.get("kind", "sine"))
    return "constant"


def waveform_of(quantity: Any, density: Any) -> Any:
    """The type "a `quantity`, constant or in time"; `density` : that of its noise."""
    return Annotated[
        Union[  # noqa: UP007 - built from a table
            Annotated[quantity, Tag("constant")],
            Annotated[Sine[quantity], Tag("sine")],
            Annotated[Ramp[quantity], Tag("ramp")],
            Annotated[Step[quantity], Tag("step")],
            Annotated[Pulses[quantity], Tag("pulses")],
            Annotated[Table[quantity], Tag("table")],
            Annotated[Noise[quantity, density], Tag("noise")],
        ],
        Discriminator(
            _kind_of,
            custom_error_type="waveform",
            custom_error_message=(
                '`kind` must be "sine", "ramp", "step", "pulses", "table" or "noise"'
            ),
        ),
    ]


AnyWaveform = float | WaveformForm

if TYPE_CHECKING:
    VoltageWave = AnyWaveform
    CurrentWave = AnyWaveform
    ElectricFieldWave = AnyWaveform
    FieldGradientWave = AnyWaveform
    MagneticFieldWave = AnyWaveform
    MagneticGradientWave = AnyWaveform
    RealWave = AnyWaveform
else:
    VoltageWave = waveform_of(Voltage, VoltageNoise)
    CurrentWave = waveform_of(Current, CurrentNoise)
    ElectricFieldWave = waveform_of(ElectricField, ElectricFieldNoise)
    FieldGradientWave = waveform_of(FieldGradient, FieldGradientNoise)
    MagneticFieldWave = waveform_of(MagneticField, MagneticFieldNoise)
    MagneticGradientWave = waveform_of(MagneticGradient, MagneticGradientNoise)
    RealWave = waveform_of(Real, RealNoise)


def packed_waveform(value: AnyWaveform) -> PackedWaveform:
    """A waveform, or a constant, as numbers."""
    if isinstance(value, WaveformForm):
        return value.packed()
    return PackedWaveform(packed.CONSTANT, (float(value),))


def waveform_breaks(value: AnyWaveform, duration: float) -> list[float]:
    """Times in (0, duration) where the waveform or its slope jumps, s."""
    return value.breaks(duration) if isinstance(value, WaveformForm) else []


def largest_value(value: AnyWaveform) -> float:
    """Largest magnitude the waveform reaches, SI."""
    return value.largest() if isinstance(value, WaveformForm) else abs(value)


def steady_value(value: AnyWaveform) -> float:
    """Largest magnitude the waveform has apart from its oscillation, SI."""
    return value.steady() if isinstance(value, WaveformForm) else abs(value)


def frequency_scale(value: AnyWaveform) -> float:
    """Highest frequency in the waveform that a step must follow, Hz."""
    return value.frequency_scale() if isinstance(value, WaveformForm) else 0.0


def waveform_words(value: AnyWaveform, unit: str) -> str:
    """A waveform in words, e.g. ``180 V amplitude at 1.1 MHz``; `unit` is that of its values."""
    return value.words(unit) if isinstance(value, WaveformForm) else spelled(value, unit)
