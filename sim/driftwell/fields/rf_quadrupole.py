"""Linear RF quadrupole: rods that focus one transverse axis while they defocus the other.

    phi(x, t) = V(t) (x^2 - y^2) / (2 r0^2)

V is the voltage between neighbouring rods' pairs, zero to peak where it is a sine: one pair is at
+V/2, the other at -V/2. With V = V0 cos(Omega t) the Mathieu parameter is
q = 2 Q V0 / (m r0^2 Omega^2) and the secular frequency beta(a, q) Omega / 2.

References
----------
W. Paul, Rev. Mod. Phys. 62 (1990) 531, eqs. 1-6.
"""

from __future__ import annotations

from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.rates import linear_rates
from driftwell.forms import Length, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    VoltageWave,
    frequency_scale,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_sum_kernel

RF_QUADRUPOLE = 2


class RfQuadrupole(FieldForm):
    """Ideal linear RF quadrupole along z, by rod radius and voltage."""

    kind: Literal["rf-quadrupole"]
    radius: Positive[Length] = key("distance from the axis to the rods", example="3.5 mm")
    voltage: VoltageWave = key("voltage between neighbouring rods", example="180 V")

    def waveform(self) -> AnyWaveform:
        return self.voltage

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            RF_QUADRUPOLE,
            (*self.centre, 1.0 / self.radius**2),
            packed_waveform(self.voltage),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        name = "secular" if frequency_scale(self.voltage) else "radial"
        return linear_rates({name: abs(body.charge_to_mass) / self.radius**2}, self.voltage)

    def words(self) -> str:
        return (
            f"linear quadrupole of rods at r0 = {spelled(self.radius, 'm')}, "
            f"{waveform_words(self.voltage, 'V')} between neighbouring rods{self.where()}"
        )


@inner_sum_kernel
def rf_quadrupole(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = -w grad g to `out_field`; return the sum of charge times g, g = (x^2 - y^2)/(2 r0^2).

    Parameters: see :mod:`driftwell.fields.table`; p = centre (3), 1/r0^2.
    """
    x, y = position[0], position[1]
    ex, ey = out_field[0], out_field[1]
    x0, y0 = p[0], p[1]
    per_area: float = p[3]
    slope = w * per_area
    total = 0.0
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        ex[i] -= slope * dx
        ey[i] += slope * dy
        total += charge[i] * (dx * dx - dy * dy)
    return 0.5 * per_area * total
