"""Three-dimensional RF quadrupole: a ring and two end caps that hold charges on all axes.

    phi(x, t) = V(t) (x^2 + y^2 - 2 z^2) / (r0^2 + 2 z0^2)

V is the voltage of the ring against the end caps, zero to peak where it is a sine; the centre is
at zero. The electrodes are the hyperboloids r^2 - 2 z^2 = r0^2 and 2 z^2 - r^2 = 2 z0^2. With
V = V0 cos(Omega t) the Mathieu parameters are q_z = 8 Q V0 / (m (r0^2 + 2 z0^2) Omega^2) and
q_r = q_z / 2 in magnitude.

References
----------
W. Paul, Rev. Mod. Phys. 62 (1990) 531, sec. 3 (from memory).
R. F. Wuerker, H. Shelton, R. V. Langmuir, J. Appl. Phys. 30 (1959) 342 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.rates import linear_rates
from driftwell.forms import Length, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, VoltageWave, packed_waveform, waveform_words
from driftwell.kernels import inner_sum_kernel

RF_QUADRUPOLE_3D = 4


class RfQuadrupole3D(FieldForm):
    """Ideal hyperbolic RF trap about z, by its two radii and the voltage."""

    kind: Literal["rf-quadrupole-3d"]
    radius: Positive[Length] = key("distance from the centre to the ring, r0", example="10 mm")
    half_length: Positive[Length] | None = key(
        "distance from the centre to each end cap, z0; left out: r0 / sqrt(2)",
        default=None,
        example="7.07 mm",
    )
    voltage: VoltageWave = key("voltage of the ring against the end caps", example="500 V")

    def waveform(self) -> AnyWaveform:
        return self.voltage

    @property
    def end_cap_distance(self) -> float:
        """z0, m."""
        return self.radius / math.sqrt(2.0) if self.half_length is None else self.half_length

    @property
    def span(self) -> float:
        """r0^2 + 2 z0^2, m^2."""
        return self.radius**2 + 2.0 * self.end_cap_distance**2

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            RF_QUADRUPOLE_3D,
            (*self.centre, 1.0 / self.span),
            packed_waveform(self.voltage),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        radial = 2.0 * abs(body.charge_to_mass) / self.span
        return linear_rates({"axial": 2.0 * radial, "radial": radial}, self.voltage)

    def words(self) -> str:
        return (
            f"3-D quadrupole trap of a ring of r0 = {spelled(self.radius, 'm')} and end caps at "
            f"z0 = {spelled(self.end_cap_distance, 'm')}, "
            f"{waveform_words(self.voltage, 'V')} between them{self.where()}"
        )


@inner_sum_kernel
def rf_quadrupole_3d(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = -w grad g; return the sum of charge times g, g = p3 (x^2 + y^2 - 2 z^2).

    p = centre (3), 1/(r0^2 + 2 z0^2).
    """
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    x0, y0, z0 = p[0], p[1], p[2]
    per_area: float = p[3]
    slope = 2.0 * w * per_area
    total = 0.0
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        dz = z[i] - z0
        ex[i] -= slope * dx
        ey[i] -= slope * dy
        ez[i] += 2.0 * slope * dz
        total += charge[i] * (dx * dx + dy * dy - 2.0 * dz * dz)
    return per_area * total
