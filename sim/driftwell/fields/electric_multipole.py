"""Two-dimensional electric multipole of any order n, endless along z.

    phi(x, t) = V(t) (r/r0)^n cos(n (theta - alpha)) = V Re[e^(-i n alpha) ((x + i y)/r0)^n]

V is the potential of the poles, which alternate between +V and -V on ideal surfaces that touch
the circle of radius r0; alpha is the direction of a positive pole. n = 1 is a pair of plates
(E = V/r0), n = 2 a quadrupole with 2 V between neighbouring poles.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 2.11 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.multipole_order import Order, multipole_name
from driftwell.fields.rates import linear_rates
from driftwell.forms import Angle, Length, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, VoltageWave, packed_waveform, waveform_words
from driftwell.kernels import inner_sum_kernel

ELECTRIC_MULTIPOLE = 5


class ElectricMultipole(FieldForm):
    """Ideal electric multipole about z, by the potential of its poles."""

    kind: Literal["electric-multipole"]
    order: Order = key("half the number of poles: 1 dipole, 2 quadrupole, 3 sextupole, ...")
    radius: Positive[Length] = key("distance from the axis to the poles, r0", example="4 mm")
    voltage: VoltageWave = key(
        "potential of the positive poles; their neighbours are at the opposite one", example="50 V"
    )
    angle: Angle = key("direction of a positive pole, from x towards y", default=0.0)

    def waveform(self) -> AnyWaveform:
        return self.voltage

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        turn = self.order * self.angle
        return PackedField(
            Role.ELECTRIC,
            ELECTRIC_MULTIPOLE,
            (*self.centre, float(self.order), 1.0 / self.radius, math.cos(turn), -math.sin(turn)),
            packed_waveform(self.voltage),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The radial motion of orders above 2 depends on its amplitude: taken at r = r0."""
        focusing = self.order * (self.order - 1) * abs(body.charge_to_mass) / self.radius**2
        stiffness = {"radial": focusing} if self.order > 1 else {}
        return linear_rates(stiffness, self.voltage)

    def words(self) -> str:
        turned = f", turned by {math.degrees(self.angle):.6g} deg" if self.angle else ""
        return (
            f"electric {multipole_name(self.order)} along z of poles at "
            f"r0 = {spelled(self.radius, 'm')}{turned}, {waveform_words(self.voltage, 'V')} "
            f"on the positive poles{self.where()}"
        )


@inner_sum_kernel
def electric_multipole(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = -w grad g; return the sum of charge times g.

    With zeta = (x + i y)/r0 and u + i v = e^(-i n alpha) zeta^(n-1): E = w (n/r0) (-u, v) and
    g = Re[(u + i v) zeta].
    p = centre (3), n, 1/r0, cos(n alpha), -sin(n alpha).
    """
    x, y = position[0], position[1]
    ex, ey = out_field[0], out_field[1]
    x0, y0 = p[0], p[1]
    order = int(p[3])
    per_length: float = p[4]
    cosine, sine = p[5], p[6]
    slope = w * p[3] * per_length
    total = 0.0
    for i in range(first, last):
        real = (x[i] - x0) * per_length
        imaginary = (y[i] - y0) * per_length
        u, v = cosine, sine
        for _ in range(order - 1):
            u, v = u * real - v * imaginary, u * imaginary + v * real
        ex[i] -= slope * u
        ey[i] += slope * v
        total += charge[i] * (u * real - v * imaginary)
    return total
