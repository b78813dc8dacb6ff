"""Uniform electric field: phi(x, t) = -w(t) n . (x - centre), with n the unit vector of `along`."""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.forms import Real, key
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    ElectricFieldWave,
    frequency_scale,
    largest_value,
    packed_waveform,
)
from driftwell.kernels import kernel

UNIFORM_ELECTRIC = 0


class UniformElectric(FieldForm):
    """The same electric field everywhere."""

    kind: Literal["uniform-electric"]
    strength: ElectricFieldWave = key("field strength", example="20 kV/m")
    along: tuple[Real, Real, Real] = key(
        "direction the field points to; any length but zero", default=(0.0, 0.0, 1.0)
    )

    def waveform(self) -> AnyWaveform:
        return self.strength

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        length = math.hypot(*self.along)
        unit = tuple(component / length for component in self.along)
        return PackedField(
            Role.ELECTRIC,
            UNIFORM_ELECTRIC,
            (*self.centre, *unit),
            packed_waveform(self.strength),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        drive = 2.0 * math.pi * frequency_scale(self.strength)
        return {"drive": drive} if drive else {}

    def words(self) -> str:
        return f"uniform electric field of up to {largest_value(self.strength):.6g} V/m"


@kernel
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
    total = 0.0
    for i in range(first, last):
        ex[i] += w * p[3]
        ey[i] += w * p[4]
        ez[i] += w * p[5]
        total -= charge[i] * (
            p[3] * (x[i] - p[0]) + p[4] * (y[i] - p[1]) + p[5] * (z[i] - p[2])
        )
    return total
