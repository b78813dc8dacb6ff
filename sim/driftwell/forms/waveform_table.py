"""Waveforms as flat arrays for compiled code; the layout is that of kernels/waveform.py."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import waveform as packed


@dataclass(frozen=True, slots=True)
class PackedWaveform:
    """One waveform as numbers: kind, parameters, and the times and values of a table."""

    kind: int
    parameters: tuple[float, ...]
    points: tuple[tuple[float, float], ...] = ()


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
        elif wave.kind == packed.NOISE:
            row[0] = len(points)
            points.extend(wave.points)
    return WaveformTable(kind, parameter, np.array(points or [(0.0, 0.0)], dtype=np.float64))
