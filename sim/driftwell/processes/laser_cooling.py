"""Doppler cooling: one laser beam, photons absorbed from it and sent out again, one by one.

A two-level ion of velocity v scatters photons of the beam at the rate

    R = (Gamma / 2) s / (1 + s + (2 delta / Gamma)^2),   delta = delta_0 - k . v             (1)

with Gamma = 2 pi linewidth, delta_0 the detuning of the laser from the ion at rest, and s the
saturation at the ion's place: s_0, or s_0 exp(-2 rho^2 / waist^2) at the distance rho from the
beam's axis. Every event gives the momentum h / lambda along the beam and as much in the direction
of the photon sent out. Events are offered at the largest rate there is, Gamma/2 s_0/(1 + s_0), and
taken with the probability R over that.

Several beams are several processes; each scatters as if it were alone, which is right at low
saturation. The internal state follows at once: right while Gamma is fast against all motion.

References
----------
D. J. Wineland and W. M. Itano, Phys. Rev. A 20 (1979) 1521; D. Leibfried, R. Blatt, C. Monroe and
D. Wineland, Rev. Mod. Phys. 75 (2003) 281, section IV (both from memory).
"""

from __future__ import annotations

import math
from typing import Literal

import numpy as np
from scipy.constants import Planck

from driftwell.forms import (
    Direction,
    Frequency,
    Length,
    Point,
    Positive,
    Real,
    key,
    spelled,
)
from driftwell.forms.body import Body
from driftwell.kernels import inner_kernel
from driftwell.kernels.circle import circle, direction
from driftwell.kernels.philox import exponential, uniforms
from driftwell.processes.form import OWN, PackedProcess, ProcessForm
from driftwell.processes.outcome import CHANGED, NOTHING, PHOTON, Event

LASER = 3
_RECOIL, _ALONG, _ACROSS, _CENTRE = OWN, OWN + 1, OWN + 4, OWN + 7
_WAVE, _DETUNING, _WIDTH, _SATURATION = OWN + 10, OWN + 11, OWN + 12, OWN + 13
_NARROW, _DIPOLE = OWN + 14, OWN + 15


class LaserCooling(ProcessForm):
    """Photons scattered from one laser beam by two-level ions."""

    kind: Literal["laser-cooling"]
    wavelength: Positive[Length] = key("wavelength of the light", example="397 nm")
    linewidth: Positive[Frequency] = key(
        "natural width of the transition, Gamma / 2 pi", example="21.6 MHz"
    )
    detuning: Frequency = key(
        "frequency of the laser less that of the ion at rest", example="-10.8 MHz"
    )
    saturation: Positive[Real] = key(
        "saturation parameter s0 on the beam's axis: intensity over that of saturation"
    )
    direction: Direction = key("direction the light travels to; any length but zero")
    waist: Positive[Length] | None = key(
        "1/e^2 radius of the beam; left out: as wide as everything", default=None, example="50 um"
    )
    centre: Point = key("a point of the beam's axis", default=(0.0, 0.0, 0.0))
    emission: Literal["isotropic", "dipole"] = key(
        "isotropic: photons leave to all directions alike; dipole: as from a dipole that turns "
        "about the beam, (1 + cos^2)",
        default="isotropic",
    )

    def packed(self, body: Body) -> PackedProcess:
        width = 2.0 * math.pi * self.linewidth
        s = self.saturation
        along = np.array(self.direction)
        across = np.cross(along, np.eye(3)[np.argmin(np.abs(along))])
        across /= np.linalg.norm(across)
        own = (
            Planck / (self.wavelength * body.mass),
            *self.direction,
            *map(float, across),
            *self.centre,
            2.0 * math.pi / self.wavelength,
            2.0 * math.pi * self.detuning,
            width,
            s,
            0.0 if self.waist is None else 2.0 / self.waist**2,
            1.0 if self.emission == "dipole" else 0.0,
        )
        return PackedProcess(LASER, own, 0.5 * width * s / (1.0 + s))

    def words(self) -> str:
        along = ", ".join(f"{each:.6g}" for each in self.direction)
        parts = [
            f"light of {spelled(self.wavelength, 'm')} along ({along}), width "
            f"{spelled(self.linewidth, 'Hz')}, detuned by {spelled(self.detuning, 'Hz')}, "
            f"saturation {self.saturation:.6g}"
        ]
        if self.waist is not None:
            parts.append(f"waist {spelled(self.waist, 'm')}")
        return ", ".join(parts)


@inner_kernel
def scatter(
    p: np.ndarray,
    key: np.ndarray,
    who: int,
    event: int,
    x: float,
    y: float,
    z: float,
    vx: float,
    vy: float,
    vz: float,
) -> Event:
    """Event number `event` of charge `who` at (x, y, z) with velocity v; see `collide`."""
    clock, taken, u1, u2 = uniforms(key, who, event, PHOTON, 0)
    wait = exponential(clock)
    nx, ny, nz = p[_ALONG], p[_ALONG + 1], p[_ALONG + 2]
    s = p[_SATURATION]
    if p[_NARROW] > 0.0:
        x, y, z = x - p[_CENTRE], y - p[_CENTRE + 1], z - p[_CENTRE + 2]
        far = nx * x + ny * y + nz * z
        s *= math.exp(-p[_NARROW] * max(x * x + y * y + z * z - far * far, 0.0))
    shift = 2.0 * (p[_DETUNING] - p[_WAVE] * (nx * vx + ny * vy + nz * vz)) / p[_WIDTH]
    most = p[_SATURATION] / (1.0 + p[_SATURATION])
    if taken * most >= s / (1.0 + s + shift * shift):
        return NOTHING, 0.0, 0.0, 0.0, wait
    if p[_DIPOLE] > 0.0:
        q = 4.0 * u1 - 2.0  # the third-degree equation z^3 + 3 z = 2 q, by Cardano
        root = math.sqrt(q * q + 1.0)
        third = (q + root) ** (1.0 / 3.0)
        along = third - 1.0 / third
        c, d = circle(u2)
        r = math.sqrt(max(1.0 - along * along, 0.0))
        fx, fy, fz = p[_ACROSS], p[_ACROSS + 1], p[_ACROSS + 2]
        gx, gy, gz = ny * fz - nz * fy, nz * fx - nx * fz, nx * fy - ny * fx
        ex = along * nx + r * (c * fx + d * gx)
        ey = along * ny + r * (c * fy + d * gy)
        ez = along * nz + r * (c * fz + d * gz)
    else:
        ex, ey, ez = direction(u1, u2)
    recoil = p[_RECOIL]
    return CHANGED, recoil * (nx + ex), recoil * (ny + ey), recoil * (nz + ez), wait
