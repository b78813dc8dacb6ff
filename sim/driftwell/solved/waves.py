"""Voltages of all electrodes sorted by how they vary in time, so that few maps carry them all.

The field is linear in the voltages: sum over electrodes of V_e(t) phi_e(x). Where electrodes follow
the same course in time, their unit solutions are added once, weighted, into one map:

    sum_e V_e(t) phi_e(x) = sum_k w_k(t) sum_e W_ke phi_e(x)                                (1)

All constant parts share one map, all sine waves of one frequency and phase (or the opposite phase)
another, and so do ramps, steps, pulses and tables of the same times. A trap with voltages on a
dozen electrodes then costs two lookups a charge, not a dozen.
"""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.forms.noise import Noise
from driftwell.forms.waveforms import (
    AnyWaveform,
    Pulses,
    Ramp,
    Sine,
    Step,
    Table,
)

Floats = NDArray[np.float64]

SAME_PHASE = 1e-12
"""rad; phases nearer than this are one."""


@dataclass(frozen=True, slots=True)
class Course:
    """One course in time that some electrodes follow.

    waveform : w_k(t), a plain number in time; 1 for what is constant
    weight : (e,) float64, V, W_ke of equation (1)
    """

    waveform: AnyWaveform
    weight: Floats


def courses(voltages: Sequence[AnyWaveform]) -> list[Course]:
    """Equation (1): the courses of all voltages, in the order they first appear."""
    found: list[tuple[AnyWaveform, Floats]] = []
    for electrode, voltage in enumerate(voltages):
        for waveform, weight in _parts(voltage):
            if weight == 0.0:
                continue
            known = next((row for w, row in found if w == waveform), None)
            if known is None:
                known = np.zeros(len(voltages))
                found.append((waveform, known))
            known[electrode] += weight
    return [Course(waveform, weight) for waveform, weight in found if weight.any()]


def _parts(voltage: AnyWaveform) -> Iterator[tuple[AnyWaveform, float]]:
    """A voltage as plain courses in time and the volts of each."""
    if isinstance(voltage, Sine):
        yield 1.0, voltage.offset
        yield _sine(voltage)
    elif isinstance(voltage, Ramp | Step):
        yield 1.0, voltage.before
        plain = {"before": 0.0, "after": 1.0}
        yield voltage.model_copy(update=plain), voltage.after - voltage.before
    elif isinstance(voltage, Pulses):
        yield 1.0, voltage.low
        plain = {"low": 0.0, "high": 1.0}
        yield voltage.model_copy(update=plain), voltage.high - voltage.low
    elif isinstance(voltage, Table):
        yield from _table(voltage)
    elif isinstance(voltage, Noise):
        yield 1.0, voltage.offset
        yield voltage.model_copy(update={"offset": 0.0}), 1.0
    else:
        yield 1.0, float(voltage)  # type: ignore[arg-type]


def _sine(voltage: Sine[float]) -> tuple[AnyWaveform, float]:
    """The oscillation with amplitude 1 and a phase from 0 to below pi, and its volts."""
    turns, phase = divmod(voltage.phase, math.pi)
    if math.pi - phase < SAME_PHASE:
        turns, phase = turns + 1, 0.0
    if phase < SAME_PHASE:
        phase = 0.0
    sign = -1.0 if turns % 2 else 1.0
    plain = {"amplitude": 1.0, "offset": 0.0, "phase": phase}
    return voltage.model_copy(update=plain), sign * voltage.amplitude


def _table(voltage: Table[float]) -> Iterator[tuple[AnyWaveform, float]]:
    """The first value, and what is added to it, as part of its largest swing."""
    first = voltage.values[0]
    swing = max((value - first for value in voltage.values), key=abs)
    yield 1.0, first
    if swing != 0.0:
        # rounded, so that tables in proportion to each other are one course
        plain = tuple(float(f"{(value - first) / swing:.15g}") for value in voltage.values)
        yield voltage.model_copy(update={"values": plain}), swing
