"""A cloud as a hand calculation sees it: number, sizes, density, temperature, drift at the start.

Sizes, density and temperature are those the scenario states; where it states none (a list of
places, a file, a beam with energy spread) they are the moments of the charges as they are placed.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.forms import on_each_axis
from driftwell.forms.body import Body
from driftwell.particles.cloud import Cloud
from driftwell.particles.shapes.ball import Ball, Ellipsoid
from driftwell.particles.shapes.beam import BeamForm
from driftwell.particles.shapes.box import Box
from driftwell.particles.shapes.cylinder import Cylinder
from driftwell.particles.shapes.gaussian import Gaussian

Floats = NDArray[np.float64]

_BALL = 4.0 * math.pi / 3.0 * math.pow(5.0, 1.5)
"""Volume of an ellipsoid over the product of its rms sizes."""
_GAUSS = math.pow(2.0 * math.pi, 1.5)
COLD = 1e-12
"""Part of a spread that is rounding: below it a cloud has no temperature, or no thickness."""


@dataclass(frozen=True)
class Group:
    """A cloud at the start.

    form : as the scenario states it
    weight : real particles each charge stands for
    position, velocity : (3, n) of its charges as placed, m and proper m/s
    """

    form: Cloud
    body: Body
    weight: float
    position: Floats
    velocity: Floats

    @property
    def name(self) -> str:
        """Its name."""
        return self.form.name

    @property
    def named(self) -> str:
        """The cloud, to end a phrase with."""
        return f'of cloud "{self.name}"'

    @property
    def count(self) -> int:
        """Simulated charges."""
        return int(self.position.shape[1])

    @property
    def number(self) -> float:
        """Real particles."""
        return self.count * self.weight

    @property
    def charge(self) -> float:
        """Charge of all, C, signed."""
        return self.number * self.body.charge

    @cached_property
    def middle(self) -> Floats:
        """Its middle, (3,), m."""
        shape = self.form.shape
        if self.peak_known or isinstance(shape, BeamForm):
            return np.array(shape.centre)
        return np.asarray(self.position.mean(axis=1))

    @cached_property
    def size(self) -> tuple[float, float, float]:
        """Rms size along x, y and z, m."""
        shape = self.form.shape
        if isinstance(shape, Gaussian):
            x, y, z = on_each_axis(shape.sigma)
            return x, y, z
        if isinstance(shape, Ball):
            return (shape.radius / math.sqrt(5.0),) * 3
        if isinstance(shape, Ellipsoid):
            x, y, z = (each / math.sqrt(5.0) for each in shape.semi_axes)
            return x, y, z
        if isinstance(shape, Box):
            x, y, z = (each / math.sqrt(12.0) for each in on_each_axis(shape.size))
            return x, y, z
        if isinstance(shape, Cylinder):
            along = np.square(shape.axis)
            square = along * shape.length**2 / 12.0 + (1.0 - along) * shape.radius**2 / 4.0
            x, y, z = np.sqrt(square)
            return float(x), float(y), float(z)
        x, y, z = self.position.std(axis=1)
        return float(x), float(y), float(z)

    @property
    def solid(self) -> bool:
        """Whether it fills a volume."""
        return self.count > 1 and min(self.size) > 1e-9 * max(self.size)

    @property
    def even(self) -> bool:
        """Whether its density is the same throughout."""
        return isinstance(self.form.shape, Ball | Ellipsoid | Box | Cylinder)

    @property
    def uniform_density(self) -> float:
        """Of the uniform ellipsoid with its number and sizes, in its own frame, 1/m^3."""
        return self.number / (_BALL * math.prod(self.size) * self.lorentz)

    @property
    def peak_density(self) -> float:
        """At its densest place, in its own frame, 1/m^3; of the uniform ellipsoid if unknown."""
        shape = self.form.shape
        if isinstance(shape, Gaussian):
            return self.number / (_GAUSS * math.prod(self.size) * self.lorentz)
        if isinstance(shape, Box):
            return self.number / (math.prod(on_each_axis(shape.size)) * self.lorentz)
        if isinstance(shape, Cylinder):
            volume = math.pi * shape.radius**2 * shape.length
            return self.number / (volume * self.lorentz)
        return self.uniform_density

    @property
    def peak_known(self) -> bool:
        """Whether the shape says what the density at the densest place is."""
        return self.even or isinstance(self.form.shape, Gaussian)

    @cached_property
    def drift(self) -> Floats:
        """Mean proper velocity, (3,), m/s."""
        motion = self.form.motion
        if motion is not None and motion.velocity is not None and not motion.divergence:
            stated = np.array(motion.velocity)
            return np.asarray(stated / math.sqrt(1.0 - float(stated @ stated) / SPEED_OF_LIGHT**2))
        mean = np.asarray(self.velocity.mean(axis=1))
        if motion is not None and motion.directed():
            return mean
        shape = self.form.shape
        moves = isinstance(shape, BeamForm) or motion is None
        return mean if moves else np.zeros(3)

    @property
    def lorentz(self) -> float:
        """Lorentz factor of the drift."""
        return math.sqrt(1.0 + float(self.drift @ self.drift) / SPEED_OF_LIGHT**2)

    @property
    def speed(self) -> float:
        """Of the drift, m/s."""
        return float(np.linalg.norm(self.drift)) / self.lorentz

    @cached_property
    def temperature(self) -> float:
        """Mean over the axes, about the drift and without rotation, K; 0 of a cold cloud."""
        motion = self.form.motion
        if motion is not None and not motion.divergence and not motion.energy_spread:
            stated = motion.temperature
            return 0.0 if stated is None else float(np.mean(on_each_axis(stated)))
        apart = self.velocity - self.velocity.mean(axis=1, keepdims=True)
        square = float(np.mean(apart**2))
        if square <= COLD * float(self.drift @ self.drift):
            return 0.0
        return self.body.mass * square / BOLTZMANN
