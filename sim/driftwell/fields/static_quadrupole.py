"""Quadrupole potential along z: holds one sign of charge axially and pushes it outwards radially.

    phi(x, t) = (k(t)/2) (z^2 - (x^2 + y^2)/2 - epsilon (x^2 - y^2)/2)

Two ways to say how strong it is:

* by electrodes: k = V/d^2 with d^2 = z0^2/2 + r0^2/4, where V is the voltage of the two end caps,
  each at the distance z0 (`half_length`) from the centre, against a ring of radius r0 (`radius`).
  The surfaces are the hyperboloids r^2 - 2 z^2 = r0^2 and 2 z^2 - r^2 = 2 z0^2. V > 0 holds
  positive charges axially.
* by `axial_frequency`: k = m omega_z^2 / q of the species named, so k has the sign of its charge.

The ellipticity epsilon makes the radial push unequal: (1 + epsilon)/2 along x, (1 - epsilon)/2
along y.

References
----------
L. S. Brown, G. Gabrielse, Rev. Mod. Phys. 58 (1986) 233, eqs. 2.1-2.4 (from memory).
L. S. Brown, G. Gabrielse, Phys. Rev. A 25 (1982) 2423 (ellipticity; from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Annotated, Literal, Self

import numpy as np

from driftwell.fields.form import FieldForm, PackedField, Role
from driftwell.fields.rates import linear_rates
from driftwell.forms import (
    Bound,
    Form,
    Frequency,
    Length,
    Name,
    Positive,
    Real,
    checked,
    key,
    refuse,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.forms.waveforms import AnyWaveform, VoltageWave, packed_waveform, waveform_words
from driftwell.kernels import inner_sum_kernel

STATIC_QUADRUPOLE = 3


class AxialFrequency(Form):
    """How fast one charge of a species oscillates along z, alone in the field."""

    species: Name = key("name of the species", example="barium")
    value: Positive[Frequency] = key("its axial frequency", example="80 kHz")


class StaticQuadrupole(FieldForm):
    """Quadrupole along z, by electrodes and voltage or by the axial frequency it gives."""

    kind: Literal["static-quadrupole"]
    voltage: VoltageWave | None = key(
        "voltage of the end caps against the ring", default=None, example="10 V"
    )
    radius: Positive[Length] | None = key(
        "distance from the centre to the ring, r0", default=None, example="5 mm"
    )
    half_length: Positive[Length] | None = key(
        "distance from the centre to each end cap, z0", default=None, example="4 mm"
    )
    axial_frequency: AxialFrequency | None = key(
        "instead of voltage and electrodes: the frequency of a species along z",
        default=None,
        example={"species": "barium", "value": "80 kHz"},
    )
    ellipticity: Annotated[Real, Bound(least=-1.0, most=1.0)] = key(
        "epsilon: the outward push is (1 + epsilon)/2 along x and (1 - epsilon)/2 along y of the "
        "axial one",
        default=0.0,
    )

    @checked
    def _one_way(self) -> Self:
        electrodes = {
            "`voltage`": self.voltage,
            "`radius`": self.radius,
            "`half_length`": self.half_length,
        }
        missing = [name for name, value in electrodes.items() if value is None]
        if self.axial_frequency is None and missing:
            raise refuse(
                "needs `voltage`, `radius` and `half_length`, or `axial_frequency` instead: "
                f"add {', '.join(missing)}"
            )
        if self.axial_frequency is not None and len(missing) < len(electrodes):
            given = [name for name, value in electrodes.items() if value is not None]
            raise refuse(f"`axial_frequency` takes the place of {', '.join(given)}: leave out one")
        return self

    def species_named(self) -> tuple[str, ...]:
        return () if self.axial_frequency is None else (self.axial_frequency.species,)

    def waveform(self) -> AnyWaveform:
        return 1.0 if self.voltage is None else self.voltage

    def curvature(self, bodies: Mapping[str, Body]) -> float:
        """The k of the docstring above for a waveform of 1, V/m^2; signed."""
        if self.axial_frequency is not None:
            omega = 2.0 * math.pi * self.axial_frequency.value
            return omega**2 / bodies[self.axial_frequency.species].charge_to_mass
        if self.radius is None or self.half_length is None:
            raise TypeError("an unchecked form")
        return 1.0 / (0.5 * self.half_length**2 + 0.25 * self.radius**2)

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        return PackedField(
            Role.ELECTRIC,
            STATIC_QUADRUPOLE,
            (
                *self.centre,
                self.curvature(bodies),
                0.5 * (1.0 + self.ellipticity),
                0.5 * (1.0 - self.ellipticity),
            ),
            packed_waveform(self.waveform()),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        axial = abs(body.charge_to_mass * self.curvature(bodies))
        radial = 0.5 * (1.0 + abs(self.ellipticity)) * axial
        return linear_rates({"axial": axial, "radial": radial}, self.waveform())

    def words(self) -> str:
        uneven = f", ellipticity {self.ellipticity:.6g}" if self.ellipticity else ""
        if self.axial_frequency is not None:
            how = (
                f"in which {self.axial_frequency.species} oscillates along z "
                f"at {spelled(self.axial_frequency.value, 'Hz')}"
            )
        else:
            how = (
                f"of end caps at z0 = {spelled(self.half_length or 0.0, 'm')} against a ring of "
                f"r0 = {spelled(self.radius or 0.0, 'm')}, {waveform_words(self.waveform(), 'V')}"
            )
        return f"static quadrupole {how}{uneven}{self.where()}"


@inner_sum_kernel
def static_quadrupole(
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

    g = (p3/2) (z^2 - p4 x^2 - p5 y^2); p = centre (3), curvature, share of x, share of y.
    """
    x, y, z = position[0], position[1], position[2]
    ex, ey, ez = out_field[0], out_field[1], out_field[2]
    x0, y0, z0 = p[0], p[1], p[2]
    curvature: float = p[3]
    share_x: float = p[4]
    share_y: float = p[5]
    slope = w * curvature
    total = 0.0
    for i in range(first, last):
        dx = x[i] - x0
        dy = y[i] - y0
        dz = z[i] - z0
        ex[i] += slope * share_x * dx
        ey[i] += slope * share_y * dy
        ez[i] -= slope * dz
        total += charge[i] * (dz * dz - share_x * dx * dx - share_y * dy * dy)
    return 0.5 * curvature * total
