"""A permanent magnet shaped as a round rod or disc, magnetised uniformly in any direction.

Along its axis it is a current sheet of mu0 j = J, the remanence (fields/magnets/sheet.py). Across,
its scalar potential is that of the charge J cos(phi) on the mantle, which depends on place as the
sheet's A_phi does; with G = A_phi/rho, b_z and b_rho of a sheet of unit strength, and x along J,

    mu0 H = -J grad(x G) = -J (G e_x + (x/rho) (b_z - 2 G) e_rho - (x/rho) b_rho e_z)           (1)

Returned is B: outside mu0 H, inside mu0 H + J, on the surface the mean of both. With the Newtonian
potential N of the solid rod of unit density, A = grad N x J / (4 pi), where

    dN/drho = -4 pi rho G,    dN/dz = U(z + L/2) - U(z - L/2)                                   (2)

    U = 2 (s E + ((a^2 - rho^2)/s) K + gamma (zeta^2/s) cel(kc, gamma^2, 1, 1))
        - 2 pi |zeta| where rho < a, half of it at rho = a                                      (3)

U is the potential of a disc of unit density; s, kc, gamma as in sheet.py. At the rims the field is
infinite. The remanence is the same everywhere and does not depend on the field: right for hard
magnets far from demagnetisation. Charges that reach the magnet are for a wall to stop.

References
----------
A. Caciagli et al., J. Magn. Magn. Mater. 456 (2018) 423, doi:10.1016/j.jmmm.2018.02.003 (from
memory): the field across, there in other combinations of the same integrals.
H. Lass, L. Blitzer, Celestial Mechanics 30 (1983) 225 (from memory): (3).
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from typing import Literal

import numpy as np

from driftwell.fields.form import PackedField, Role
from driftwell.fields.magnets.axis import about_axis
from driftwell.fields.magnets.form import AboutAxis, turning_rates
from driftwell.fields.magnets.sheet import axial, radial, round_about
from driftwell.forms import Direction, Length, NonNegative, Positive, key, spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import (
    AnyWaveform,
    MagneticFieldWave,
    largest_value,
    packed_waveform,
    waveform_words,
)
from driftwell.kernels import inner_kernel, kernel
from driftwell.kernels.elliptic import first_and_second, third

MAGNET_CYLINDER = 66


class MagnetCylinder(AboutAxis):
    """Uniformly magnetised round rod or disc."""

    kind: Literal["magnet-cylinder"]
    radius: Positive[Length] = key("radius of the magnet", example="5 mm")
    length: Positive[Length] = key("length along its axis", example="10 mm")
    remanence: MagneticFieldWave = key(
        "remanent flux density: mu0 times the magnetisation", example="1.2 T"
    )
    magnetised_along: Direction | None = key(
        "direction of the magnetisation; left out: that of `along`", default=None
    )
    clearance: NonNegative[Length] = key(
        "distance from the magnet that charges keep; only the automatic step depends on it",
        default=0.0,
    )

    def waveform(self) -> AnyWaveform:
        return self.remanence

    def direction(self) -> tuple[float, tuple[float, float, float]]:
        """Part of the magnetisation's unit vector along the axis, and the vector of the rest."""
        if self.magnetised_along is None:
            return 1.0, (0.0, 0.0, 0.0)
        axis, unit = np.array(self.along), np.array(self.magnetised_along)
        part = float(axis @ unit)
        across = unit - part * axis
        return part, (float(across[0]), float(across[1]), float(across[2]))

    def strongest(self) -> float:
        """The field at the clearance, T, before the middle of a face.

        Along the axis by the closed form; across it that of an endless rod, which a short one
        exceeds by up to 14 %.
        """
        part, across = self.direction()
        far = self.clearance + self.length
        ends = far / math.hypot(self.radius, far)
        ends -= self.clearance / math.hypot(self.radius, self.clearance)
        side = (self.radius / (self.radius + self.clearance)) ** 2
        share = math.hypot(part * ends, math.hypot(*across) * side)
        return 0.5 * largest_value(self.remanence) * share

    def packed(self, bodies: Mapping[str, Body]) -> PackedField:
        part, across = self.direction()
        return PackedField(
            Role.MAGNETIC,
            MAGNET_CYLINDER,
            (*self.centre, *self.along, self.radius, 0.5 * self.length, part, *across),
            packed_waveform(self.remanence),
        )

    def rates(self, body: Body, bodies: Mapping[str, Body]) -> dict[str, float]:
        """The cyclotron motion is that before the middle of a face, at the `clearance`."""
        return turning_rates(body, self.strongest(), self.remanence)

    def words(self) -> str:
        direction = ""
        if self.magnetised_along is not None:
            shown = ", ".join(f"{component:.6g}" for component in self.magnetised_along)
            direction = f" magnetised along ({shown})"
        return (
            f"round magnet{self.axis_words()} of radius {spelled(self.radius, 'm')} and length "
            f"{spelled(self.length, 'm')}{direction}, remanence "
            f"{waveform_words(self.remanence, 'T')}{self.where()}"
        )


@inner_kernel
def disc(rho: float, zeta: float, a: float) -> float:
    """U of equation (3), over 4 pi."""
    wide, thin = a + rho, a - rho
    s2 = wide * wide + zeta * zeta
    s = math.sqrt(s2)
    kc = math.sqrt((thin * thin + zeta * zeta) / s2)
    k, e = first_and_second(kc)
    total = s * e + thin * wide / s * k
    inside = 0.5
    if thin != 0.0:
        gamma = thin / wide
        if zeta != 0.0:
            total += gamma * zeta * zeta / s * third(kc, gamma * gamma, 1.0, 1.0)
        inside = 1.0 if thin > 0.0 else 0.0
    return total / (2.0 * math.pi) - 0.5 * abs(zeta) * inside


@inner_kernel
def _part_inside(distance: float) -> float:
    """1 inside (distance > 0), 0 outside, a half on the surface."""
    return 1.0 if distance > 0.0 else (0.5 if distance == 0.0 else 0.0)


@kernel
def magnet_cylinder(
    p: np.ndarray,
    data: np.ndarray,
    w: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_b: np.ndarray,
) -> None:
    """Add B to `out_b`; p = centre (3), axis (3), a, L/2, unit magnetisation along and across (3).

    w is the remanence, T.
    """
    a, half, part = p[6], p[7], w * p[8]
    mx, my, mz = w * p[9], w * p[10], w * p[11]
    across = mx != 0.0 or my != 0.0 or mz != 0.0
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        up = axial(rho, z + half, a) - axial(rho, z - half, a)
        away = radial(rho, z + half, a) - radial(rho, z - half, a)
        along_axis, along_away, along_m = part * up, part * away, 0.0
        if across:
            g = round_about(rho, z + half, a) - round_about(rho, z - half, a)
            x = mx * ax + my * ay + mz * az
            along_m = _part_inside(a - rho) * _part_inside(half - abs(z)) - g  # (1)
            along_axis += x * away
            if rho > 0.0:
                along_away -= x * (up - 2.0 * g) / (rho * rho)
        out_b[0, i] += along_axis * p[3] + along_away * ax + along_m * mx
        out_b[1, i] += along_axis * p[4] + along_away * ay + along_m * my
        out_b[2, i] += along_axis * p[5] + along_away * az + along_m * mz


@kernel
def magnet_cylinder_induced(
    p: np.ndarray,
    data: np.ndarray,
    rate: float,
    position: np.ndarray,
    first: int,
    last: int,
    out_e: np.ndarray,
) -> None:
    """Add E = -dA/dt to `out_e`; p as in :func:`magnet_cylinder`."""
    a, half = p[6], p[7]
    mx, my, mz = rate * p[9], rate * p[10], rate * p[11]
    across = mx != 0.0 or my != 0.0 or mz != 0.0
    for i in range(first, last):
        z, ax, ay, az, rho = about_axis(p, position[0, i], position[1, i], position[2, i])
        g = round_about(rho, z + half, a) - round_about(rho, z - half, a)
        # A = g (part n x away) + (n dU/4 pi - g away) x m
        vx, vy, vz = rate * p[8] * p[3], rate * p[8] * p[4], rate * p[8] * p[5]
        vx, vy, vz = g * (vx + mx), g * (vy + my), g * (vz + mz)
        ex = vy * az - vz * ay
        ey = vz * ax - vx * az
        ez = vx * ay - vy * ax
        if across:
            pull = disc(rho, z + half, a) - disc(rho, z - half, a)
            ex += pull * (p[4] * mz - p[5] * my)
            ey += pull * (p[5] * mx - p[3] * mz)
            ez += pull * (p[3] * my - p[4] * mx)
        out_e[0, i] -= ex
        out_e[1, i] -= ey
        out_e[2, i] -= ez
