"""Waveforms as a scenario declares them, and their packing for compiled code.

Any voltage, current or field strength may be a plain quantity (constant) or a table such as
``{ amplitude = "180 V", frequency = "1.1 MHz" }``.
"""

from __future__ import annotations

import math
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Annotated, Any, Generic, Literal, Self, TypeVar, Union

import numpy as np
from numpy.typing import NDArray
from pydantic import Discriminator, Tag, model_validator
from pydantic_core import PydanticCustomError

from driftwell.forms.form import Form, key
from driftwell.forms.quantities import (
    Angle,
    Count,
    Current,
    ElectricField,
    Frequency,
    MagneticField,
    NonNegative,
    Positive,
    Real,
    Time,
    Voltage,
)
from driftwell.kernels import waveform as packed

Q = TypeVar("Q", bound=float)


@dataclass(frozen=True, slots=True)
class PackedWaveform:
    """One waveform as numbers: kind, parameters, table points, and what the step choice needs."""

    kind: int
    parameters: tuple[float, ...]
    points: tuple[tuple[float, float], ...] = ()


class WaveformForm(Form):
    """Base of all waveforms given as a table."""

    def packed(self) -> PackedWaveform:
        """The waveform as numbers for compiled code."""
        raise TypeError(f"{type(self).__name__} must say how it is packed")

    def breaks(self, duration: float) -> list[float]:
        """Times in (0, duration) where the value or its slope jumps, s."""
        return []

    def frequency_scale(self) -> float:
        """Highest frequency a step must follow, Hz; 0 where nothing oscillates."""
        return 0.0

    def largest(self) -> float:
        """Largest magnitude the value reaches, SI."""
        raise TypeError(f"{type(self).__name__} must say how large it gets")


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


class Ramp(WaveformForm, Generic[Q]):
    """A straight line from one level to another; constant before and after."""

    kind: Literal["ramp"] = key("straight ramp between two levels")
    before: Q = key("level until `start`")
    after: Q = key("level from `end` on")
    start: NonNegative[Time] = key("when the ramp begins")
    end: Positive[Time] = key("when the ramp ends")

    @model_validator(mode="after")
    def _ordered(self) -> Self:
        if self.end <= self.start:
            raise PydanticCustomError("order", "`end` must be later than `start`")
        return self

    def packed(self) -> PackedWaveform:
        return PackedWaveform(packed.RAMP, (self.before, self.after, self.start, self.end))

    def breaks(self, duration: float) -> list[float]:
        return _within([self.start, self.end], duration)

    def largest(self) -> float:
        return max(abs(self.before), abs(self.after))


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


class Pulses(WaveformForm, Generic[Q]):
    """One pulse, or a train of them, with straight edges."""

    kind: Literal["pulses"] = key("one pulse or a train of pulses")
    low: Q = key("level between pulses")
    high: Q = key("level of a pulse")
    start: NonNegative[Time] = key("when the first pulse begins to rise")
    width: Positive[Time] = key("from the beginning of the rise to the beginning of the fall")
    rise: NonNegative[Time] = key("duration of each edge", default=0.0)
    period: Positive[Time] | None = key("time from pulse to pulse; left out: one pulse", default=None)
    count: Positive[Count] | None = key("number of pulses; left out: no end", default=None)

    @model_validator(mode="after")
    def _ordered(self) -> Self:
        if self.rise > self.width:
            raise PydanticCustomError("order", "`rise` must not be longer than `width`")
        if self.period is not None and self.width + self.rise > self.period:
            raise PydanticCustomError(
                "order", "`period` must be at least `width` and `rise` together"
            )
        if self.count is not None and self.period is None:
            raise PydanticCustomError("order", "`count` needs a `period`")
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
        edges = {0.0, self.rise, self.width, self.width + self.rise}
        return _within(
            (self.start + i * (self.period or 0.0) + edge for i in range(number) for edge in edges),
            duration,
        )

    def largest(self) -> float:
        return max(abs(self.low), abs(self.high))


class Table(WaveformForm, Generic[Q]):
    """Straight lines between given points; constant before the first and after the last."""

    kind: Literal["table"] = key("points joined by straight lines")
    times: tuple[Time, ...] = key("times of the points, rising")
    values: tuple[Q, ...] = key("values at those times")

    @model_validator(mode="after")
    def _ordered(self) -> Self:
        if len(self.times) != len(self.values) or len(self.times) < 2:
            raise PydanticCustomError(
                "order", "`times` and `values` must hold the same number of points, at least 2"
            )
        if any(b <= a for a, b in zip(self.times, self.times[1:], strict=False)):
            raise PydanticCustomError("order", "`times` must rise from point to point")
        return self

    def packed(self) -> PackedWaveform:
        points = tuple(zip(self.times, self.values, strict=True))
        return PackedWaveform(packed.TABLE, (), points)

    def breaks(self, duration: float) -> list[float]:
        return _within(self.times, duration)

    def largest(self) -> float:
        return max(abs(value) for value in self.values)


def _within(times: Iterable[float], duration: float) -> list[float]:
    return sorted({t for t in times if 0.0 < t < duration})


def _kind_of(value: Any) -> str:
    """Which kind a raw value means: a string is constant, a table without `kind` a sine."""
    if isinstance(value, WaveformForm):
        return str(getattr(value, "kind", ""))
    if isinstance(value, dict):
        return str(value.get("kind", "sine"))
    return "constant"


def waveform_of(quantity: Any) -> Any:
    """The type "a `quantity`, constant or in time"."""
    return Annotated[
        Union[  # noqa: UP007 - built from a table
            Annotated[quantity, Tag("constant")],
            Annotated[Sine[quantity], Tag("sine")],
            Annotated[Ramp[quantity], Tag("ramp")],
            Annotated[Step[quantity], Tag("step")],
            Annotated[Pulses[quantity], Tag("pulses")],
            Annotated[Table[quantity], Tag("table")],
        ],
        Discriminator(_kind_of),
    ]


AnyWaveform = float | WaveformForm

if TYPE_CHECKING:
    VoltageWave = AnyWaveform
    CurrentWave = AnyWaveform
    ElectricFieldWave = AnyWaveform
    MagneticFieldWave = AnyWaveform
    RealWave = AnyWaveform
else:
    VoltageWave = waveform_of(Voltage)
    CurrentWave = waveform_of(Current)
    ElectricFieldWave = waveform_of(ElectricField)
    MagneticFieldWave = waveform_of(MagneticField)
    RealWave = waveform_of(Real)


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


def frequency_scale(value: AnyWaveform) -> float:
    """Highest frequency in the waveform that a step must follow, Hz."""
    return value.frequency_scale() if isinstance(value, WaveformForm) else 0.0


@dataclass(frozen=True, slots=True)
class WaveformTable:
    """All waveforms of a run as flat arrays for compiled code.

    kind : (m,) int64; parameter : (m, 8) float64; data : (k, 2) float64, times and values.
    """

    kind: NDArray[np.int64]
    parameter: NDArray[np.float64]
    data: NDArray[np.float64]


def waveform_table(waveforms: Sequence[PackedWaveform]) -> WaveformTable:
    """Lay the waveforms one after the other; tables share one array of points."""
    kind = np.array([wave.kind for wave in waveforms], dtype=np.int64)
    parameter = np.zeros((len(waveforms), packed.PARAMETERS))
    points: list[tuple[float, float]] = []
    for row, wave in zip(parameter, waveforms, strict=True):
        row[: len(wave.parameters)] = wave.parameters
        if wave.kind == packed.TABLE:
            row[:2] = len(points), len(wave.points)
            points.extend(wave.points)
    return WaveformTable(kind, parameter, np.array(points or [(0.0, 0.0)], dtype=np.float64))
