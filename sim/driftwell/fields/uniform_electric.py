"""Uniform electric field: phi(x, t) = -w(t) n . (x - centre), with n the unit vector of `along`."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.forms import Direction, key
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    ElectricFieldWave,
    frequency_scale,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_sum_kernel

UNIFORM_ELECTRIC = 0


class UniformElectric(FieldForm):
    """The same electric field everywhere."""

    kind: Literal["uniform-electric"]
    strength: ElectricFieldWave = key("field strength", example="20 kV/m")
    along: Direction = key(
        "direction the field points to; any length but zero", default=(0.0, 0.0, 1.0)
    )

    def waveform(self) -> AnyWaveform:
        return self.strength

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            UNIFORM_ELECTRIC,
            (*self.centre, *self.along),
            packed_waveform(self.strength),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        drive = 2.0 * math.pi * frequency_scale(self.strength)
        return {"drive": drive} if drive else {}

    def words(self) -> str:
        direction = ", ".join(f"{component:.6g}" for component in self.along)
        return f"uniform electric field along ({direction}), {waveform_words(self.strength, 'V/m')}"


@inner_sum_kernel
def uniform_electric(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = w n; return the sum of charge times g, g = -n . (x - centre); p = centre, n."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    x0, y0, z0 = p[0], p[1], p[2]
    nx, ny, nz = p[3], p[4], p[5]
    total = 0.0
    for i in range(first, last):
        ex[i] += w * nx
        ey[i] += w * ny
        ez[i] += w * nz
        total -= charge[i] * (nx * (x[i] - x0) + ny * (y[i] - y0) + nz * (z[i] - z0))
    return total
