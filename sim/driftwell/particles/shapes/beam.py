"""Bunches of a beam by emittances and Twiss parameters: four distributions of one family.

With the coordinates of a plane made round, X = x / sqrt(beta) and X' = (alpha x + beta x') /
sqrt(beta), the density in (X, X', Y, Y') depends on the ellipsoidal radius only,

    R^2 = (X^2 + X'^2) / eps_x + (Y^2 + Y'^2) / eps_y                              (1)

where eps is the rms emittance, eps^2 = <x^2><x'^2> - <x x'>^2 of the centred coordinates, and the
mean of R^2 is 4 by its definition. The directions on the sphere are uniform; the kinds differ in R:

    Kapchinskij-Vladimirskij   R^2 = 4          on the surface          edge / rms emittance 4
    waterbag                   R^2 = 6 sqrt(u)  uniform in the volume                        6
    parabolic                  R^2 = 8 w        density 1 - R^2/8, w of Beta(2, 2)           8
    Gaussian                   R^2 = 2 g        g of Gamma(2)                          no edge

with u uniform. The slopes are x' = dx/dz = u_x / u_z for a beam along z.

References
----------
I. M. Kapchinskij, V. V. Vladimirskij, Proc. Int. Conf. High Energy Accel., CERN (1959) 274.
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 5.3.4 (from memory).
"""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, Literal, Self

import numpy as np

from driftwell.forms import (
    Direction,
    Emittance,
    Energy,
    Length,
    NonNegative,
    Positive,
    Real,
    checked,
    key,
    on_each_axis,
    per_axis,
    refuse,
)
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.particles.draws import Draws, Placing
from driftwell.particles.frame import frame
from driftwell.particles.in_words import energy_in_words
from driftwell.particles.motion import CUT, spread_energies
from driftwell.particles.proper_velocity import Floats, proper_speed
from driftwell.particles.shapes.form import Placement, ShapeForm

if TYPE_CHECKING:
    EmittancePair = float | tuple[float, float]
    RealPair = float | tuple[float, float]
    LengthPair = float | tuple[float, float]
else:
    EmittancePair = per_axis(Positive[Emittance], 2)
    RealPair = per_axis(Real, 2)
    LengthPair = per_axis(Positive[Length], 2)


class BeamForm(ShapeForm):
    """Base of the beams: one bunch at one time, its centre at `centre`."""

    emittance: EmittancePair = key(
        "rms emittance, geometric: one for both transverse planes, or a list for both",
        example=["5 mm mrad", "5 mm mrad"],
    )
    alpha: RealPair = key(
        "Twiss alpha: one for both transverse planes, or a list; above 0 the beam converges",
        default=0.0,
    )
    beta: LengthPair = key(
        "Twiss beta: one for both transverse planes, or a list; rms size is sqrt(emittance * beta)",
        example="0.8 m",
    )
    kinetic_energy: Positive[Energy] = key("mean kinetic energy of one particle", example="30 keV")
    energy_spread: NonNegative[Energy] = key(
        "rms spread of the kinetic energy (Gaussian, cut at 5 rms); at most a fifth of the energy",
        default=0.0,
        example="20 eV",
    )
    length: Positive[Length] | None = key(
        "full length of a bunch with uniform line density; give this or `rms_length`",
        default=None,
        example="40 mm",
    )
    rms_length: Positive[Length] | None = key(
        "rms length of a bunch with Gaussian line density; give this or `length`", default=None
    )
    along: Direction = key(
        "direction of flight, any length but zero; along z the transverse planes are x and y, "
        "along x they are y and z, along y they are z and x",
        default=(0.0, 0.0, 1.0),
    )
    placing: Placing = key(
        "random: independent of each other; even: a low-discrepancy sequence in position, slope "
        "and energy together",
        default="random",
    )

    @checked
    def _consistent(self) -> Self:
        if (self.length is None) == (self.rms_length is None):
            raise refuse("needs either `length` or `rms_length`")
        if self.energy_spread > self.kinetic_energy / CUT:
            raise refuse("`energy_spread` must be at most a fifth of `kinetic_energy`")
        return self

    def square_radius(self, points: Floats) -> Floats:
        """R^2 of eq. 1 for points (n,) uniform in (0, 1)."""
        raise TypeError(f"{type(self).__name__} must say how its radius is distributed")

    def sets_velocity(self, folder: Path) -> bool:
        return True

    def place(self, count: int, draws: Draws, body: Body, folder: Path) -> Placement:
        points = draws.unit_points("place", count, 6, self.placing)
        square = self.square_radius(points[0])
        own = np.empty((3, count))
        slope = np.ones((3, count))
        shares = (points[1], 1.0 - points[1])
        planes = zip(
            on_each_axis(self.emittance, 2),
            on_each_axis(self.alpha, 2),
            on_each_axis(self.beta, 2),
            strict=True,
        )
        for plane, (emittance, alpha, beta) in enumerate(planes):
            amplitude = np.sqrt(emittance * square * shares[plane])
            angle = 2.0 * np.pi * points[2 + plane]
            place, rate = amplitude * np.cos(angle), amplitude * np.sin(angle)
            own[plane] = np.sqrt(beta) * place
            slope[plane] = (rate - alpha * place) / np.sqrt(beta)
        own[2] = self._along_bunch(points[4])
        energy = spread_energies(points[5], self.kinetic_energy, self.energy_spread)
        speed = proper_speed(energy, body.mass)
        axes = frame(self.along).T
        velocity = speed * slope / np.sqrt(np.sum(slope**2, axis=0))
        return Placement(self.moved(axes @ own), axes @ velocity)

    def _along_bunch(self, points: Floats) -> Floats:
        if self.length is not None:
            return self.length * (points - 0.5)
        from scipy.special import ndtri

        return np.asarray((self.rms_length or 0.0) * ndtri(points))

    def words(self) -> str:
        if self.length is not None:
            bunch = f"{spelled(self.length, 'm')} long"
        else:
            bunch = f"rms length {spelled(self.rms_length or 0.0, 'm')}"
        planes = [value * 1e6 for value in on_each_axis(self.emittance, 2)]
        emittance = " and ".join(f"{value:.6g} mm mrad" for value in dict.fromkeys(planes))
        spread = f" ({energy_in_words(self.energy_spread)} rms)" if self.energy_spread else ""
        return (
            f"{self.named()} beam of {energy_in_words(self.kinetic_energy)}{spread}, "
            f"rms emittance {emittance}, {bunch}"
        )

    def named(self) -> str:
        """The distribution's usual name."""
        raise TypeError(f"{type(self).__name__} must have a name")


class BeamKV(BeamForm):
    """Kapchinskij-Vladimirskij: every charge on one ellipsoid, uniform in each projection."""

    kind: Literal["beam-kv"]

    def square_radius(self, points: Floats) -> Floats:
        return np.full(points.shape, 4.0)

    def named(self) -> str:
        return "Kapchinskij-Vladimirskij"


class BeamWaterbag(BeamForm):
    """Waterbag: uniform within an ellipsoid of the four transverse coordinates."""

    kind: Literal["beam-waterbag"]

    def square_radius(self, points: Floats) -> Floats:
        return np.asarray(6.0 * np.sqrt(points))

    def named(self) -> str:
        return "waterbag"


class BeamParabolic(BeamForm):
    """Parabolic: density in the four transverse coordinates falls as 1 - R^2/8 to 0 at the edge."""

    kind: Literal["beam-parabolic"]

    def square_radius(self, points: Floats) -> Floats:
        from scipy.special import betaincinv

        return np.asarray(8.0 * betaincinv(2.0, 2.0, points))

    def named(self) -> str:
        return "parabolic"


class BeamGaussian(BeamForm):
    """Gaussian in the four transverse coordinates, without cut."""

    kind: Literal["beam-gaussian"]

    def square_radius(self, points: Floats) -> Floats:
        from scipy.special import gammaincinv

        return np.asarray(2.0 * gammaincinv(2.0, points))

    def named(self) -> str:
        return "Gaussian"
