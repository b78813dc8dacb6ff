"""A charged wire on the axis of a grounded cylinder, endless along z.

    phi(x, t) = V(t) ln(R/r) / ln(R/a)

V is the potential of the wire of radius a; the cylinder of radius R is at zero. An attractive
wire binds charges to orbits about it, which turn with sqrt(|q V| / (m ln(R/a))) / r when circular.
The formula goes on inside the wire and outside the cylinder, where it has no meaning: put walls
there. On the axis (r = 0) field and potential are not numbers: a charge there stops the run as not
finite.

Cost: one logarithm for each charge and call, for the potential; the field needs none.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1998), sec. 2.11 with no angle (from memory).
K. H. Kingdon, Phys. Rev. 21 (1923) 408 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal, Self

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.rates import linear_rates
from driftwell.forms import Length, Positive, checked, key, refuse, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, VoltageWave, packed_waveform, waveform_words
from driftwell.kernels import inner_sum_kernel

WIRE_IN_CYLINDER = 8


class WireInCylinder(FieldForm):
    """Field between a wire along z and a grounded cylinder around it."""

    kind: Literal["wire-in-cylinder"]
    wire_radius: Positive[Length] = key("radius of the wire, a", example="50 um")
    cylinder_radius: Positive[Length] = key("inner radius of the cylinder, R", example="10 mm")
    voltage: VoltageWave = key(
        "potential of the wire, the cylinder being at zero; negative draws positive charges in",
        example="-300 V",
    )

    @checked
    def _ordered(self) -> Self:
        if not self.wire_radius < self.cylinder_radius:
            raise refuse("`wire_radius` must be less than `cylinder_radius`")
        return self

    def waveform(self) -> AnyWaveform:
        return self.voltage

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            WIRE_IN_CYLINDER,
            (
                *self.centre,
                self.cylinder_radius**2,
                1.0 / math.log(self.cylinder_radius / self.wire_radius),
            ),
            packed_waveform(self.voltage),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The radial motion is that of a circular orbit at the wire, the fastest there is."""
        logarithm = math.log(self.cylinder_radius / self.wire_radius)
        stiffness = abs(body.charge_to_mass) / (logarithm * self.wire_radius**2)
        return linear_rates({"radial": stiffness}, self.voltage)

    def words(self) -> str:
        return (
            f"wire of radius {spelled(self.wire_radius, 'm')} along z at "
            f"{waveform_words(self.voltage, 'V')}, in a grounded cylinder of radius "
            f"{spelled(self.cylinder_radius, 'm')}{self.where()}"
        )


@inner_sum_kernel
def wire_in_cylinder(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    charge: np.ndarray,
    first: int,
    last: int,
    out_field: np.ndarray,
) -> float:
    """Add E = -w grad g; return the sum of charge times g; p = centre (3), R^2, 1/ln(R/a).

    At r = 0 the radial field is 0 times infinity: NaN.
    """
    x, y = position[0], position[1]
    ex, ey = out_field[0], out_field[1]
    x0, y0 = p[0], p[1]
    square: float = p[3]
    per_logarithm: float = p[4]
    slope = w * per_logarithm
    total = 0.0
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        r2 = dx * dx + dy * dy
        radial = slope / r2
        ex[i] += radial * dx
        ey[i] += radial * dy
        total -= charge[i] * math.log(r2 / square)
    return 0.5 * per_logarithm * total
