"""How a cloud moves at its start: at rest, thermal, directed, or thermal about a direction."""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Annotated, Self

import numpy as np

from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.forms import (
    Angle,
    Bound,
    Direction,
    Energy,
    Form,
    Frequency,
    NonNegative,
    Positive,
    Temperature,
    Velocity,
    checked,
    key,
    on_each_axis,
    per_axis,
    refuse,
)
from driftwell.forms.body import Body
from driftwell.forms.spelling import spelled
from driftwell.particles.draws import Draws
from driftwell.particles.frame import frame
from driftwell.particles.in_words import each_in_words, energy_in_words
from driftwell.particles.proper_velocity import (
    Floats,
    carried,
    kinetic_energy,
    proper_speed,
    proper_velocity,
)

if TYPE_CHECKING:
    TemperaturePerAxis = float | tuple[float, float, float]
else:
    TemperaturePerAxis = per_axis(NonNegative[Temperature])
SmallAngle = Annotated[Angle, Bound(least=0.0, most=math.pi / 2.0)]

HOTTEST = 1e-3
"""Largest kT / (m c^2): Maxwell's distribution is drawn without relativity."""
CUT = 5.0
"""Kinetic energies stay within this many rms spreads of their mean."""


def spread_energies(points: Floats, mean: float, rms: float) -> Floats:
    """Kinetic energies, J, about `mean`: Gaussian, cut at five rms on both sides.

    points : (n,) in (0, 1). The cut lowers the rms by 8e-6 of itself.
    """
    from scipy.special import ndtr, ndtri

    outside = ndtr(-CUT)
    return np.asarray(mean + rms * ndtri(outside + points * (1.0 - 2.0 * outside)))


class Motion(Form):
    """Velocities of a cloud. Temperature and direction may be combined."""

    temperature: TemperaturePerAxis | None = key(
        "temperature of Maxwell's distribution: one for all axes, or a list for x, y, z; of a "
        "moving cloud as seen moving along with it",
        default=None,
        example="300 K",
    )
    velocity: tuple[Velocity, Velocity, Velocity] | None = key(
        "velocity of the whole cloud",
        default=None,
        example=["0 m/s", "0 m/s", "400 m/s"],
    )
    kinetic_energy: Positive[Energy] | None = key(
        "mean kinetic energy of one particle of a cloud that flies along `along`",
        default=None,
        example="30 keV",
    )
    along: Direction | None = key(
        "direction of flight that goes with `kinetic_energy`, any length but zero; left out: z",
        default=None,
        example=[0, 0, 1],
    )
    divergence: SmallAngle = key(
        "rms angle to the direction of flight in each of the two planes that hold it (Gaussian)",
        default=0.0,
        example="2 mrad",
    )
    energy_spread: NonNegative[Energy] = key(
        "rms spread of the kinetic energy (Gaussian, cut at 5 rms); at most a fifth of the energy",
        default=0.0,
        example="0.5 eV",
    )

    rotation: Frequency = key(
        "turns of the cloud as a whole about the z direction through its mean place; "
        "positive from x to y",
        default=0.0,
        example="120 kHz",
    )

    @checked
    def _consistent(self) -> Self:
        if self.velocity is not None and self.kinetic_energy is not None:
            raise refuse("needs either `velocity` or `kinetic_energy`, not both")
        if self.along is not None and self.kinetic_energy is None:
            raise refuse("`along` needs a `kinetic_energy`")
        if (self.divergence or self.energy_spread) and not self.directed():
            raise refuse(
                "`divergence` and `energy_spread` need a `kinetic_energy` or a `velocity` that "
                "is not zero"
            )
        if self.velocity is not None and math.hypot(*self.velocity) >= SPEED_OF_LIGHT:
            raise refuse(f"`velocity` must be slower than light ({SPEED_OF_LIGHT:.0f} m/s)")
        if self.kinetic_energy is not None and self.energy_spread > self.kinetic_energy / CUT:
            raise refuse("`energy_spread` must be at most a fifth of `kinetic_energy`")
        return self

    def directed(self) -> bool:
        """Whether the cloud as a whole moves."""
        return self.kinetic_energy is not None or any(self.velocity or ())

    def faults(self, body: Body) -> list[tuple[str, str]]:
        """What cannot be for a particle of `body`: keys, and what is needed of each."""
        found = []
        hottest = HOTTEST * body.mass * SPEED_OF_LIGHT**2 / BOLTZMANN
        if self.temperature is not None and max(on_each_axis(self.temperature)) > hottest:
            found.append(
                (
                    "temperature",
                    f"must be at most {spelled(hottest, 'K')} for {body.name}: Maxwell's "
                    "distribution holds while k T is below a thousandth of the rest energy",
                )
            )
        if self.directed() and self.energy_spread > self.mean_energy(body) / CUT:
            found.append(
                (
                    "energy_spread",
                    "must be at most a fifth of the kinetic energy, "
                    f"{energy_in_words(self.mean_energy(body) / CUT)}",
                )
            )
        return found

    def mean_energy(self, body: Body) -> float:
        """Kinetic energy of the directed part of the motion, J."""
        if self.kinetic_energy is not None:
            return self.kinetic_energy
        if self.velocity is None:
            return 0.0
        with np.errstate(all="ignore"):  # infinite where the speed rounds to that of light
            velocity = proper_velocity(np.array(self.velocity)[:, None])
            return float(kinetic_energy(velocity, body.mass)[0])

    def velocities(self, count: int, draws: Draws, body: Body) -> Floats:
        """Proper velocities, (3, count), m/s.

        Notes
        -----
        A thermal velocity is drawn in the frame of the particle's directed motion and carried
        over to the laboratory, with the components of `temperature` along x, y and z. That a
        moving observer counts particles at other times in the two frames is left out; it shifts
        the mean energy by a part k T / (m c^2).
        """
        directed = self._directed_velocities(count, draws, body)
        if self.temperature is None:
            return directed
        rms = np.sqrt(BOLTZMANN * np.array(on_each_axis(self.temperature)) / body.mass)
        thermal = draws.stream("temperature").standard_normal((count, 3)).T * rms[:, None]
        return carried(thermal, directed) if self.directed() else thermal

    def turned(self, velocity: Floats, position: Floats) -> Floats:
        """Velocities (3, n) of charges at places (3, n), m, with the rotation of the whole."""
        if not self.rotation:
            return velocity
        x, y, _ = position - position.mean(axis=1)[:, None]
        about = 2.0 * math.pi * self.rotation * np.array([-y, x, np.zeros_like(x)])
        return carried(velocity, proper_velocity(about))

    def _directed_velocities(self, count: int, draws: Draws, body: Body) -> Floats:
        if not self.directed():
            return np.zeros((3, count))
        if self.velocity is not None and not (self.divergence or self.energy_spread):
            return np.repeat(proper_velocity(np.array(self.velocity)[:, None]), count, axis=1)
        energy = np.full(count, self.mean_energy(body))
        if self.energy_spread:
            points = draws.unit_points("energy spread", count, 1)[0]
            energy = spread_energies(points, self.mean_energy(body), self.energy_spread)
        return proper_speed(energy, body.mass) * self._directions(count, draws)

    def _directions(self, count: int, draws: Draws) -> Floats:
        """Unit vectors, (3, count)."""
        along = frame(self.direction())
        if not self.divergence:
            return np.repeat(along[2][:, None], count, axis=1)
        angles = draws.stream("divergence").standard_normal((count, 2)).T * self.divergence
        polar = np.hypot(angles[0], angles[1])
        # sin(polar)/polar, 1 at 0: the two components of the angle turned into those of a vector
        across = angles * np.sinc(polar / np.pi)
        return np.asarray(along.T @ np.vstack([across, np.cos(polar)]))

    def direction(self) -> tuple[float, float, float]:
        """Unit vector of the directed motion."""
        if self.velocity is None:
            return self.along or (0.0, 0.0, 1.0)
        x, y, z = np.array(self.velocity) / math.hypot(*self.velocity)
        return float(x), float(y), float(z)

    def words(self) -> str:
        """The motion in words, e.g. ``at 300 K``."""
        parts = []
        if self.velocity is not None and any(self.velocity):
            parts.append(f"moving with ({', '.join(f'{v:.6g}' for v in self.velocity)}) m/s")
        if self.kinetic_energy is not None:
            direction = ", ".join(f"{component:.6g}" for component in self.direction())
            parts.append(f"{energy_in_words(self.kinetic_energy)} along ({direction})")
        if self.divergence:
            parts.append(f"divergence {spelled(self.divergence, 'rad')} rms")
        if self.energy_spread:
            parts.append(f"energy spread {energy_in_words(self.energy_spread)} rms")
        if self.temperature is not None:
            parts.append(f"at {each_in_words(on_each_axis(self.temperature), 'K', ' / ')}")
        if self.rotation:
            parts.append(f"turning about z at {spelled(self.rotation, 'Hz')}")
        return ", ".join(parts) or "at rest"
