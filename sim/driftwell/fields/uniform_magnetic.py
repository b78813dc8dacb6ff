"""Uniform magnetic field: B(x, t) = w(t) n, with n the unit vector of `along`.

While it changes in time it induces the electric field of a coil symmetric about `centre`,

    A = B x (x - centre) / 2,    E = -dA/dt = -(dB/dt) x (x - centre) / 2

A uniform B alone does not fix the induced field: it needs the currents that make it. This is the
solution without charges for a long solenoid, or for coils round the line through `centre` along n.

References
----------
L. D. Landau, E. M. Lifshitz, The Classical Theory of Fields, 4th ed. (1975), sec. 19 (A of a
uniform field; from memory).
"""

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
    MagneticFieldWave,
    frequency_scale,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_kernel

UNIFORM_MAGNETIC = 1


class UniformMagnetic(FieldForm):
    """The same magnetic field everywhere; `centre` matters only while the field changes."""

    kind: Literal["uniform-magnetic"]
    strength: MagneticFieldWave = key("flux density", example="1.5 T")
    along: Direction = key(
        "direction the field points to; any length but zero", default=(0.0, 0.0, 1.0)
    )

    def waveform(self) -> AnyWaveform:
        return self.strength

    def strongest(self) -> float:
        return largest_value(self.strength)

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.UNIFORM_MAGNETIC,
            UNIFORM_MAGNETIC,
            (*self.centre, *self.along),
            packed_waveform(self.strength),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        rates = {"cyclotron": abs(body.charge_to_mass) * self.strongest()}
        drive = 2.0 * math.pi * frequency_scale(self.strength)
        return {"drive": drive, **rates} if drive else rates

    def words(self) -> str:
        direction = ", ".join(f"{component:.6g}" for component in self.along)
        return (
            f"uniform magnetic field along ({direction}), "
            f"{waveform_words(self.strength, 'T')}{self.where()}"
        )


@inner_kernel
def uniform_magnetic(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B = w n to `out_b`; p = centre (3), n (3)."""
    bx, by, bz = out_b[0], out_b[1], out_b[2]
    wx, wy, wz = w * p[3], w * p[4], w * p[5]
    for i in range(first, last):
        bx[i] += wx
        by[i] += wy
        bz[i] += wz


@inner_kernel
def uniform_magnetic_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E = -(rate / 2) n x (x - centre) to `out_e`; p = centre (3), n (3)."""
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_e[0], out_e[1], out_e[2]
    x0, y0, z0 = p[0], p[1], p[2]
    hx, hy, hz = 0.5 * rate * p[3], 0.5 * rate * p[4], 0.5 * rate * p[5]
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        dz = z[i] - z0
        ex[i] -= hy * dz - hz * dy
        ey[i] -= hz * dx - hx * dz
        ez[i] -= hx * dy - hy * dx
