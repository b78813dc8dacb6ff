"""Two-dimensional magnetic multipole of any order n, endless along z.

    B_y + i B_x = B0(t) e^(-i n alpha) ((x + i y)/r0)^(n-1)
    A_z = -B0(t) (r0/n) Re[e^(-i n alpha) ((x + i y)/r0)^n]

B0 is the field at the radius r0 (at the tip of a pole). With alpha = 0 it is a normal multipole:
on the x axis B points along y, B_y = B0 (x/r0)^(n-1). alpha turns the magnet about z from x
towards y; alpha = 90 deg / n makes it skew. While B0 changes, E_z = -dA_z/dt is induced.

References
----------
H. Wiedemann, Particle Accelerator Physics, 4th ed. (2015), sec. 3.3 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal, Self

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.multipole_order import Order, multipole_name
from driftwell.forms import Angle, Length, Positive, checked, key, refuse, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    MagneticFieldWave,
    MagneticGradientWave,
    frequency_scale,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_kernel

MAGNETIC_MULTIPOLE = 6


class MagneticMultipole(FieldForm):
    """Ideal magnetic multipole about z, by its field at a radius or, a quadrupole, by gradient."""

    kind: Literal["magnetic-multipole"]
    order: Order = key("half the number of poles: 1 dipole, 2 quadrupole, 3 sextupole, ...")
    radius: Positive[Length] = key(
        "distance from the axis where the field is `strength`, r0: that of the poles",
        example="20 mm",
    )
    strength: MagneticFieldWave | None = key(
        "flux density at `radius`", default=None, example="0.3 T"
    )
    gradient: MagneticGradientWave | None = key(
        "of a quadrupole, instead of `strength`: growth of the field with the distance",
        default=None,
        example="12 T/m",
    )
    angle: Angle = key("turn about z, from x towards y; 90 deg / order makes it skew", default=0.0)

    @checked
    def _one_way(self) -> Self:
        if (self.strength is None) == (self.gradient is None):
            raise refuse("needs one of `strength` and `gradient`")
        if self.gradient is not None and self.order != 2:
            raise refuse("`gradient` belongs to order 2; give `strength`, the field at `radius`")
        return self

    def waveform(self) -> AnyWaveform:
        if self.strength is not None:
            return self.strength
        return 0.0 if self.gradient is None else self.gradient

    def scale(self) -> float:
        """Field at `radius` for a waveform of 1, T."""
        return 1.0 if self.gradient is None else self.radius

    def strongest(self) -> float:
        return self.scale() * largest_value(self.waveform())

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        turn = self.order * self.angle
        return PackedField(
            Role.MAGNETIC,
            MAGNETIC_MULTIPOLE,
            (
                *self.centre,
                float(self.order),
                1.0 / self.radius,
                self.scale() * math.cos(turn),
                -self.scale() * math.sin(turn),
            ),
            packed_waveform(self.waveform()),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that at r = r0, the strongest inside the magnet."""
        rates = {"cyclotron": abs(body.charge_to_mass) * self.strongest()}
        drive = 2.0 * math.pi * frequency_scale(self.waveform())
        return {"drive": drive, **rates} if drive else rates

    def words(self) -> str:
        turned = f", turned by {math.degrees(self.angle):.6g} deg" if self.angle else ""
        if self.gradient is None:
            how = f"{waveform_words(self.waveform(), 'T')} at r0 = {spelled(self.radius, 'm')}"
        else:
            how = waveform_words(self.waveform(), "T/m")
        return f"magnetic {multipole_name(self.order)} along z{turned}, {how}{self.where()}"


@inner_kernel
def magnetic_multipole(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), n, 1/r0, cos(n alpha), -sin(n alpha), both for w = 1 T."""
    x, y = position[0], position[1]
    bx, by = out_b[0], out_b[1]
    x0, y0 = p[0], p[1]
    order, per_length = int(p[3]), p[4]
    cosine, sine = w * p[5], w * p[6]
    for i in range(first, last):
        real = (x[i] - x0) * per_length
        imaginary = (y[i] - y0) * per_length
        u, v = cosine, sine
        for _ in range(order - 1):
            u, v = u * real - v * imaginary, u * imaginary + v * real
        bx[i] += v
        by[i] += u


@inner_kernel
def magnetic_multipole_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E_z = -dA_z/dt to `out_e`; p as in :func:`magnetic_multipole`."""
    x, y, ez = position[0], position[1], out_e[2]
    x0, y0 = p[0], p[1]
    order, per_length = int(p[3]), p[4]
    cosine, sine = p[5], p[6]
    slope = rate / (p[3] * per_length)
    for i in range(first, last):
        real = (x[i] - x0) * per_length
        imaginary = (y[i] - y0) * per_length
        u, v = cosine, sine
        for _ in range(order):
            u, v = u * real - v * imaginary, u * imaginary + v * real
        ez[i] += slope * u
