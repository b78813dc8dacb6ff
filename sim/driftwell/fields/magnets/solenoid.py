"""A finite solenoid: a round current sheet, or a thick winding as several sheets.

    B_z = mu0 j (axial(z + L/2) - axial(z - L/2)),  j = N I / L

and so B_rho and A_phi, with the parts of an end in fields/magnets/sheet.py. A winding of some
thickness is the sum over sheets at the places of Gauss and Legendre's rule between its inner and
outer radius. That is exact to rounding where charges are not nearer to the winding than a few
tenths of its thickness (docs/numerics/magnets.md); inside the winding it is not the field. A flat
coil is a thick one of small length.

References
----------
N. Derby, S. Olbert, Am. J. Phys. 78 (2010) 229, doi:10.1119/1.3256157 (from memory).
M. Abramowitz, I. Stegun, Handbook of Mathematical Functions (1964), sec. 25.4 (from memory).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Annotated, Literal

import numpy as np

from driftwell.constants import MAGNETIC_CONSTANT
from driftwell.fields.form import PackedField, Role
from driftwell.fields.magnets.axis import about_axis
from driftwell.fields.magnets.form import AboutAxis, turning_rates
from driftwell.fields.magnets.sheet import axial, radial, round_about
from driftwell.forms import Bound, Count, Length, NonNegative, Positive, Real, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    CurrentWave,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import kernel

SOLENOID = 65


class Solenoid(AboutAxis):
    """Coil wound evenly over a length, of one thin layer or of some thickness."""

    kind: Literal["solenoid"]
    radius: Positive[Length] = key(
        "radius of the thin layer, or inner radius of a thick winding", example="20 mm"
    )
    length: Positive[Length] = key("length of the winding along the axis", example="100 mm")
    thickness: NonNegative[Length] = key(
        "of the winding, outwards from `radius`; 0: one thin layer", default=0.0
    )
    current: CurrentWave = key(
        "current in the wire; positive turns right-handed about `along`", example="5 A"
    )
    turns: Positive[Real] = key("number of turns of the whole winding", default=1.0)
    sheets: Annotated[Count, Bound(least=1, most=64)] = key(
        "current sheets that a winding with a thickness is taken as", default=12
    )

    def waveform(self) -> AnyWaveform:
        return self.current

    def layers(self) -> tuple[tuple[float, float], ...]:
        """Radius, m, of each sheet, and its share of the turns."""
        if self.thickness == 0.0:
            return ((self.radius, 1.0),)
        places, weights = np.polynomial.legendre.leggauss(self.sheets)
        radii = self.radius + 0.5 * self.thickness * (1.0 + places)
        return tuple((float(r), float(0.5 * w)) for r, w in zip(radii, weights, strict=True))

    def strongest(self) -> float:
        """The field at the centre, T."""
        amperes = self.turns * largest_value(self.current)
        return math.fsum(
            share * MAGNETIC_CONSTANT * amperes / math.hypot(self.length, 2.0 * radius)
            for radius, share in self.layers()
        )

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        strength = MAGNETIC_CONSTANT * self.turns / self.length
        return PackedField(
            Role.MAGNETIC,
            SOLENOID,
            (*self.centre, *self.along, 0.5 * self.length, strength),
            packed_waveform(self.current),
            tuple(number for layer in self.layers() for number in layer),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that at the centre, the fastest on the axis.

        Near the winding of a coil that is shorter than wide the field is stronger: give the step
        where charges go there.
        """
        return turning_rates(body, self.strongest(), self.current)

    def words(self) -> str:
        thick = f", {spelled(self.thickness, 'm')} thick" if self.thickness else ""
        turns = f"{self.turns:.6g} turns, " if self.turns != 1.0 else ""
        return (
            f"solenoid{self.axis_words()} of radius {spelled(self.radius, 'm')} and length "
            f"{spelled(self.length, 'm')}{thick}, {turns}"
            f"{waveform_words(self.current, 'A')}{self.where()}"
        )


@kernel
def solenoid(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), axis (3), L/2, mu0 N/L; data = radius, share of sheets."""
    half = p[6]
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        up = away = 0.0
        for k in range(0, data.size, 2):
            a, share = data[k], w * p[7] * data[k + 1]
            up += share * (axial(rho, z + half, a) - axial(rho, z - half, a))
            away += share * (radial(rho, z + half, a) - radial(rho, z - half, a))
        out_b[0, i] += up * p[3] + away * ax
        out_b[1, i] += up * p[4] + away * ay
        out_b[2, i] += up * p[5] + away * az


@kernel
def solenoid_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E_phi = -dA_phi/dt to `out_e`; p and data as in :func:`solenoid`."""
    half = p[6]
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        around = 0.0
        for k in range(0, data.size, 2):
            a, share = data[k], rate * p[7] * data[k + 1]
            around += share * (round_about(rho, z + half, a) - round_about(rho, z - half, a))
        out_e[0, i] -= around * (p[4] * az - p[5] * ay)
        out_e[1, i] -= around * (p[5] * ax - p[3] * az)
        out_e[2, i] -= around * (p[3] * ay - p[4] * ax)
