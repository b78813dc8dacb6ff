"""Quadro-logarithmic well: harmonic along z, held radially by orbiting a central electrode.

    phi(x, t) = (k(t)/2) (z^2 - r^2/2) + (k(t)/2) Rm^2 ln(r/Rm)

The axial frequency sqrt(k q/m) does not depend on any amplitude. A circular orbit of radius R
turns with omega_z sqrt((Rm^2/R^2 - 1)/2) and oscillates radially with omega_z sqrt(Rm^2/R^2 - 2);
it is stable inside Rm/sqrt(2). On the axis (r = 0) field and potential are not numbers: a charge
there stops the run as not finite. What bounds the well (central and outer electrode) are walls.

Cost: one logarithm for each charge and call, for the potential; the field needs none.

References
----------
K. H. Kingdon, Phys. Rev. 21 (1923) 408 (from memory).
R. D. Knight, Appl. Phys. Lett. 38 (1981) 221 (from memory).
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
from driftwell.forms.waveforms import (
    AnyWaveform,
    FieldGradientWave,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_sum_kernel

QUADRO_LOGARITHMIC = 7


class QuadroLogarithmic(FieldForm):
    """Ideal quadro-logarithmic well about z."""

    kind: Literal["quadro-logarithmic"]
    curvature: FieldGradientWave = key(
        "k, the gradient of the axial field; positive holds positive charges", example="3.0e7 V/m^2"
    )
    characteristic_radius: Positive[Length] = key(
        "Rm, where the radial field vanishes; inside it points to the axis where k is positive",
        example="20 mm",
    )

    def waveform(self) -> AnyWaveform:
        return self.curvature

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            QUADRO_LOGARITHMIC,
            (*self.centre, self.characteristic_radius**2),
            packed_waveform(self.curvature),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The radial motion depends on the orbit: taken as twice the axial one.

        That is a circular orbit at Rm/sqrt(6), 0.41 Rm; an orbit that comes nearer to the axis is
        faster, so that its step must be given.
        """
        stiffness = abs(body.charge_to_mass)
        return linear_rates({"axial": stiffness, "radial": 4.0 * stiffness}, self.curvature)

    def words(self) -> str:
        return (
            f"quadro-logarithmic well about z, curvature "
            f"{waveform_words(self.curvature, 'V/m^2')}, characteristic radius "
            f"{spelled(self.characteristic_radius, 'm')}{self.where()}"
        )


@inner_sum_kernel
def quadro_logarithmic(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = -w grad g; return the sum of charge times g; p = centre (3), Rm^2.

    At r = 0 the radial field is 0 times infinity: NaN.
    """
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    x0, y0, z0 = p[0], p[1], p[2]
    square: float = p[3]
    total = 0.0
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        dz = z[i] - z0
        r2 = dx * dx + dy * dy
        radial = 0.5 * w * (1.0 - square / r2)
        ex[i] += radial * dx
        ey[i] += radial * dy
        ez[i] -= w * dz
        total += charge[i] * (dz * dz - 0.5 * r2 + 0.5 * square * math.log(r2 / square))
    return 0.5 * total
