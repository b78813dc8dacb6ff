"""What a cloud is as a plasma: plasma frequency, Debye length, coupling parameter.

    plasma frequency     f_p = sqrt(n q^2 / (eps0 m)) / (2 pi)                                (1)
    Debye length         lambda_D = sqrt(eps0 kB T / (n q^2))                                 (2)
    coupling parameter   Gamma = q^2 / (4 pi eps0 a kB T),   a = (3 / (4 pi n))^(1/3)         (3)

n is the number density of real particles: at its peak, or that of the uniform ellipsoid with the
same rms sizes (:mod:`driftwell.answers.density`). T is the mean over the three axes of the
temperature about the cloud's mean velocity, without the rigid rotation about `rotation_axis` where
that is given. q and m are those of one real particle, of this cloud alone. A cloud that flies fast
is taken in the frame of its mean velocity: T is seen there, and n is the laboratory's divided by
the Lorentz factor.

The error is one jackknife of density and temperature together. Charges ordered by their repulsion
scatter less than it says. Charges that stand for several have the density and temperature of the
real ones but a Gamma that is not theirs: their own is w^(2/3) times as large.

References
----------
NRL Plasma Formulary (J. D. Huba, 2019), fundamental plasma parameters (eqs. 1 and 2);
S. Ichimaru, Rev. Mod. Phys. 54 (1982) 1017 (eq. 3). From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import Charges, charges_at, number_in_words
from driftwell.answers.density import (
    LEAST_FOR_PEAK,
    LEAST_FOR_UNIFORM,
    peak_density,
    uniform_density,
)
from driftwell.answers.evidence import CloudFacts, Evidence
from driftwell.answers.form import AXES, Axis, InstantQuestion, instant_in_words
from driftwell.answers.kinds.temperature import to_moving_frame
from driftwell.answers.rigid_rotation import without_rotation
from driftwell.answers.sampling import Bools, jackknife_error
from driftwell.constants import BOLTZMANN, COULOMB_CONSTANT, ELECTRIC_CONSTANT, SPEED_OF_LIGHT
from driftwell.errors import AnswerError
from driftwell.forms import key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


class _PlasmaQuestion(InstantQuestion):
    """What the three share: how density and temperature are taken."""

    density: Literal["peak", "uniform"] = key(
        "peak: at the densest place; uniform: of the uniform ellipsoid with the same rms sizes",
        default="peak",
    )

    def of_plasma(self, density: float, kelvin: float, cloud: CloudFacts) -> float:
        """The value from n, 1/m^3, and T, K, of real particles."""
        raise TypeError(f"{type(self).__name__} must say how it is worked out")

    def kelvin(self, charges: Charges) -> float:
        """Temperature of the charges; not asked for here."""
        return 0.0

    def hot(self) -> bool:
        """Whether the temperature is part of the value."""
        return True

    def answer(self, evidence: Evidence) -> Answer:
        peak = self.density == "peak"
        least = LEAST_FOR_PEAK if peak else LEAST_FOR_UNIFORM
        charges = charges_at(evidence, self.of, self.time_in(evidence), least)
        if charges.cloud.charge == 0.0:
            raise AnswerError("particles without charge are no plasma")
        density = peak_density(charges) if peak else uniform_density(charges)
        gamma = _lorentz_factor(charges)

        def value(keep: Bools) -> float:
            kelvin = self.kelvin(charges.kept(keep))
            return self.of_plasma(density.of(keep) / gamma, kelvin, charges.cloud)

        everyone = np.ones(len(charges), dtype=np.bool_)
        kelvin = self.kelvin(charges)
        if self.hot() and kelvin <= 0.0:
            raise AnswerError("all charges have the same velocity: no temperature")
        notes = [
            f"density {density.of(everyone) / gamma:.3g} 1/m^3",
            *([f"temperature {spelled(kelvin, 'K', 4)}"] if self.hot() else []),
            number_in_words(len(charges), charges.cloud),
            density.note,
        ]
        error = jackknife_error(value, len(charges))
        return self.answered(value(everyone), error, "; ".join(notes))

    def how(self) -> str:
        """Cloud, density and time in words."""
        which = "at its densest place" if self.density == "peak" else "as a uniform ellipsoid"
        return f'of cloud "{self.of}" {which} {instant_in_words(self.at)}'


class PlasmaFrequency(_PlasmaQuestion):
    """Plasma frequency of a cloud."""

    unit: ClassVar[str] = "Hz"
    ask: Literal["plasma-frequency"] = key("plasma frequency, in cycles per second")

    def hot(self) -> bool:
        return False

    def of_plasma(self, density: float, kelvin: float, cloud: CloudFacts) -> float:
        square = density * cloud.charge**2 / (ELECTRIC_CONSTANT * cloud.mass)
        return math.sqrt(square) / (2.0 * math.pi)

    def words(self) -> str:
        return f"plasma frequency {self.how()}"


class _HotPlasmaQuestion(_PlasmaQuestion):
    """Base of those that need the temperature."""

    rotation_axis: Axis | None = key(
        "take the rigid rotation about this axis, through the centre, out of the temperature",
        default=None,
    )

    def kelvin(self, charges: Charges) -> float:
        axis = None if self.rotation_axis is None else AXES.index(self.rotation_axis)
        return thermal(charges, axis)


class DebyeLength(_HotPlasmaQuestion):
    """Debye length of a cloud by itself."""

    unit: ClassVar[str] = "m"
    ask: Literal["debye-length"] = key("Debye length of the cloud by itself")

    def of_plasma(self, density: float, kelvin: float, cloud: CloudFacts) -> float:
        return math.sqrt(ELECTRIC_CONSTANT * BOLTZMANN * kelvin / (density * cloud.charge**2))

    def words(self) -> str:
        return f"Debye length {self.how()}"


class CouplingParameter(_HotPlasmaQuestion):
    """Coulomb energy at the mean spacing over the thermal energy."""

    unit: ClassVar[str] = "1"
    ask: Literal["coupling-parameter"] = key(
        "coupling parameter: Coulomb energy at the mean spacing over the thermal energy"
    )

    def of_plasma(self, density: float, kelvin: float, cloud: CloudFacts) -> float:
        spacing = math.pow(3.0 / (4.0 * math.pi * density), 1.0 / 3.0)
        return COULOMB_CONSTANT * cloud.charge**2 / (spacing * BOLTZMANN * kelvin)

    def words(self) -> str:
        return f"coupling parameter {self.how()}"


def thermal(charges: Charges, rotation_axis: int | None) -> float:
    """Mean temperature, K, about the mean velocity, and about a rigid rotation where one is named.

    Each mean taken out costs its degree of freedom: one an axis, and one for the rotation.
    """
    mean = charges.velocity.mean(axis=1)
    apart = np.einsum("ij,jn->in", to_moving_frame(mean), charges.velocity - mean[:, None])
    degrees = 3 * (len(charges) - 1)
    if rotation_axis is not None:
        apart = without_rotation(charges.position, apart, rotation_axis)
        degrees -= 1
    return float(charges.cloud.mass * np.sum(apart**2) / (degrees * BOLTZMANN))


def _lorentz_factor(charges: Charges) -> float:
    mean = charges.velocity.mean(axis=1)
    return math.sqrt(1.0 + float(mean @ mean) / SPEED_OF_LIGHT**2)
