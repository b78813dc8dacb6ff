"""A magnetic multipole of finite length, whose field falls off smoothly at both ends.

With all lengths in units of r0 and (u + i v) = e^(-i n alpha) (x + i y)^(n-1), the potential of a
multipole of order n whose strength along the axis is g(z) is the series

    psi = (B0/n) sum_j c_j g^(2j)(z) r^(2j) S,   S = Im (u + i v)(x + i y)                      (1)
    c_j = (-1)^j n! / (4^j j! (n + j)!)

which obeys Laplace's equation. Taken to j = 3 it does so up to its last term; the field used is

    B = grad psi + (B0/n) (c_3/n) g^(8) r^6 C (-y, x, 0),   C = Re (u + i v)(x + i y)           (2)

where the second part makes it the curl of a vector potential, so that div B = 0 and Faraday's law
hold exactly. What is left is curl B, of the order n + 6 in the radius. The strength is

    g(z) = (tanh((z + L/2)/b) - tanh((z - L/2)/b)) / 2                                          (3)

in the middle 1 where L is long against b, at the ends a half; its integral is L. Derivatives are
polynomials in the tangents. Where r0 reaches 1.571 b the series has no sum: such a magnet is
refused. The vector potential is, with f_j = (B0/n) c_j g^(2j),

    A_x,y = (x, y) (C/n) sum f_j' r^(2j),    A_z = -(C/n) sum (n + 2j) f_j r^(2j)               (4)

and the gradient of C sum chi_j r^(2j+2), with 4 (j+1) (n+j+1) chi_j = -(2/n) f_j' - chi_(j-1)'',
which makes its divergence vanish to the same order: the induced E then has no charges.

References
----------
K. L. Brown, R. V. Servranckx, SLAC-PUB-3381 (1984) (from memory): the series off the axis.
H. A. Enge, Rev. Sci. Instrum. 35 (1964) 278, doi:10.1063/1.1718806 (from memory): the fall of a
fringe, here with one coefficient: (tanh(x) + 1)/2 = 1/(1 + exp(-2 x)).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal, Self

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.magnets.form import turning_rates
from driftwell.fields.multipole_order import Order, multipole_name
from driftwell.forms import Angle, Length, Positive, checked, key, refuse, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    MagneticFieldWave,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_kernel, kernel

MULTIPOLE_MAGNET = 68
TERMS = 4
"""Terms of the series: j = 0 to 3."""
DERIVATIVES = 2 * TERMS + 1
COEFFICIENTS = DERIVATIVES + 1


class MultipoleMagnet(FieldForm):
    """Magnetic multipole about z of finite length, with soft edges."""

    kind: Literal["multipole-magnet"]
    order: Order = key("half the number of poles: 1 dipole, 2 quadrupole, 3 sextupole, ...")
    radius: Positive[Length] = key(
        "distance from the axis where the field is `strength`, r0: that of the poles",
        example="20 mm",
    )
    strength: MagneticFieldWave = key(
        "flux density at `radius` in the middle of a long magnet", example="0.3 T"
    )
    length: Positive[Length] = key(
        "effective length: that of a magnet without fringes of the same integral", example="100 mm"
    )
    edge: Positive[Length] = key(
        "how soft the ends are: the strength falls from 88 % to 12 % over twice this length",
        example="20 mm",
    )
    angle: Angle = key("turn about z, from x towards y; 90 deg / order makes it skew", default=0.0)

    @checked
    def _sharp(self) -> Self:
        if self.radius >= 0.5 * math.pi * self.edge:
            raise refuse(
                "`edge` must be longer than 0.64 times `radius`: the field off the axis of sharper "
                "ends has no series. Take a longer `edge`, or a smaller `radius` with the "
                "`strength` there"
            )
        return self

    def waveform(self) -> AnyWaveform:
        return self.strength

    def strongest(self) -> float:
        """The field at r0 in the middle, T."""
        middle = math.tanh(0.5 * self.length / self.edge)
        return largest_value(self.strength) * middle

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        turn = self.order * self.angle
        return PackedField(
            Role.MAGNETIC,
            MULTIPOLE_MAGNET,
            (
                *self.centre,
                float(self.order),
                self.radius,
                math.cos(turn),
                -math.sin(turn),
                0.5 * self.length / self.radius,
                self.radius / self.edge,
            ),
            packed_waveform(self.strength),
            _tables(self.order),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that at r = r0, the strongest inside the magnet."""
        return turning_rates(body, self.strongest(), self.strength)

    def words(self) -> str:
        turned = f", turned by {math.degrees(self.angle):.6g} deg" if self.angle else ""
        return (
            f"magnetic {multipole_name(self.order)} along z of length {spelled(self.length, 'm')} "
            f"with edges of {spelled(self.edge, 'm')}{turned}, "
            f"{waveform_words(self.strength, 'T')} at r0 = {spelled(self.radius, 'm')}"
            f"{self.where()}"
        )


def _tables(n: int) -> tuple[float, ...]:
    """c_j, then chi_j by g^(2j+1), then the polynomials of the derivatives of the tangent."""
    series, gauge = [1.0 / n], []
    for j in range(1, TERMS):
        series.append(-series[-1] / (4.0 * j * (n + j)))
    last = 0.0
    for j in range(TERMS):
        last = (-2.0 * series[j] / n - last) / (4.0 * (j + 1) * (n + j + 1))
        gauge.append(last)
    derivatives = np.zeros((DERIVATIVES, COEFFICIENTS))
    derivatives[0, 1] = 1.0
    for k in range(1, DERIVATIVES):  # d tanh/dx = 1 - tanh^2
        slope = derivatives[k - 1, 1:] * np.arange(1.0, COEFFICIENTS)
        derivatives[k, :-1] = slope
        derivatives[k, 2:] -= slope[:-1]
    numbers = [float(c) for c in derivatives.ravel()]
    return (*series, *gauge, *numbers)


@inner_kernel
def _derivative(
    order: int, low: float, high: float, per_edge: float, polynomials: np.ndarray
) -> float:
    """g^(order), from the tangents of both ends."""
    start = order * COEFFICIENTS
    a = b = 0.0
    for k in range(order + 1, -1, -1):
        c = polynomials[start + k]
        a = a * low + c
        b = b * high + c
    return 0.5 * (a - b) * per_edge**order


@kernel
def multipole_magnet(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), n, r0, cos(n alpha), -sin(n alpha), L/2 and 1/b by r0.

    data : see :func:`_tables`; w is the strength, T
    """
    n, half, per_edge = p[3], p[7], p[8]
    per_length = 1.0 / p[4]
    polynomials = data[2 * TERMS :]
    for i in range(first, last):
        x = (position[0, i] - p[0]) * per_length
        y = (position[1, i] - p[1]) * per_length
        z = (position[2, i] - p[2]) * per_length
        low, high = math.tanh((z + half) * per_edge), math.tanh((z - half) * per_edge)
        u, v = p[5], p[6]
        for _ in range(int(n) - 1):
            u, v = u * x - v * y, u * y + v * x
        c, s = u * x - v * y, u * y + v * x
        r2 = x * x + y * y
        power, before = 1.0, 0.0  # r^(2j), 2 j r^(2j-2)
        value = slope = along = 0.0
        for j in range(TERMS):
            f = data[j] * _derivative(2 * j, low, high, per_edge, polynomials)
            value += f * power
            slope += f * before
            along += data[j] * power * _derivative(2 * j + 1, low, high, per_edge, polynomials)
            if j < TERMS - 1:
                before = 2.0 * (j + 1) * power
                power *= r2
        twist = data[TERMS - 1] / n * power * c  # (2)
        twist *= _derivative(2 * TERMS, low, high, per_edge, polynomials)
        out_b[0, i] += w * (value * n * v + slope * x * s - twist * y)
        out_b[1, i] += w * (value * n * u + slope * y * s + twist * x)
        out_b[2, i] += w * along * s


@kernel
def multipole_magnet_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E = -dA/dt to `out_e`; p and data as in :func:`multipole_magnet`."""
    n, half, per_edge = p[3], p[7], p[8]
    per_length = 1.0 / p[4]
    scale = -rate * p[4]
    polynomials = data[2 * TERMS :]
    for i in range(first, last):
        x = (position[0, i] - p[0]) * per_length
        y = (position[1, i] - p[1]) * per_length
        z = (position[2, i] - p[2]) * per_length
        low, high = math.tanh((z + half) * per_edge), math.tanh((z - half) * per_edge)
        u, v = p[5], p[6]
        for _ in range(int(n) - 1):
            u, v = u * x - v * y, u * y + v * x
        c = u * x - v * y
        r2 = x * x + y * y
        power = 1.0
        across = along = across_n = 0.0
        for j in range(TERMS):
            f = data[j] * _derivative(2 * j, low, high, per_edge, polynomials)
            odd = _derivative(2 * j + 1, low, high, per_edge, polynomials)
            even = _derivative(2 * j + 2, low, high, per_edge, polynomials)
            gauge = data[TERMS + j]
            across += (data[j] / n + gauge * (2.0 * j + 2.0)) * odd * power * c
            along += (gauge * even * r2 - (n + 2.0 * j) / n * f) * power * c
            across_n += gauge * odd * power * r2 * n
            power *= r2
        out_e[0, i] += scale * (across * x + across_n * u)
        out_e[1, i] += scale * (across * y - across_n * v)
        out_e[2, i] += scale * along
