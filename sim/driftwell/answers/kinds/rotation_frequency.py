"""Rotation frequency of a cloud about an axis through its centre: that of the rigid rotor.

    f = omega / (2 pi),   omega = sum of (a v_b - b v_a) / sum of (a^2 + b^2)                 (1)

(:mod:`driftwell.answers.rigid_rotation`). Positive is right-handed about the axis: from x to y
about z. Velocities are proper ones, so the charges must be slow against light. How rigid the
rotation is, the note says: the charges are parted into four shells of equal number by their
distance from the axis, and the rms of what their own rates differ from the whole one is told
beside what chance would make of it.

References
----------
R. C. Davidson, Physics of Nonneutral Plasmas (1990), ch. 3; D. H. E. Dubin, T. M. O'Neil, Rev. Mod.
Phys. 71 (1999) 87 (rigid rotation of a plasma in thermal equilibrium). From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.form import AXES, Axis
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.answers.rigid_rotation import across, rigid_rate, without_rotation
from driftwell.errors import AnswerError
from driftwell.forms import key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

_SHELLS = 4
_LEAST_IN_SHELL = 10


class RotationFrequency(MomentQuestion):
    """Rotation frequency of a cloud about an axis through its centre."""

    unit: ClassVar[str] = "Hz"
    ask: Literal["rotation-frequency"] = key("turns per second about an axis through the centre")
    axis: Axis = key("the axis; positive is right-handed about it", default="z")

    def of_charges(self, charges: Charges) -> float:
        axis = AXES.index(self.axis)
        a, b = across(axis)
        if float(np.ptp(charges.position[a])) == 0.0 == float(np.ptp(charges.position[b])):
            raise AnswerError(f"all charges lie on one line along {self.axis}")
        return rigid_rate(charges.position, charges.velocity, axis) / (2.0 * math.pi)

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        a, b = across(AXES.index(self.axis))
        c = moments.covariance
        inertia = c[:, a, a] + c[:, b, b]
        if inertia.min() <= 0.0:
            raise AnswerError(f"all charges lie on one line along {self.axis}")
        return np.asarray((c[:, a, 3 + b] - c[:, b, 3 + a]) / inertia / (2.0 * math.pi))

    def remark_at(self, charges: Charges) -> str:
        if len(charges) < _SHELLS * _LEAST_IN_SHELL:
            return ""
        apart, chance = shell_deviation(charges, AXES.index(self.axis))
        return (
            f"shells differ from it by {spelled(apart, 'Hz', 2)} rms, "
            f"{spelled(chance, 'Hz', 2)} by chance"
        )

    def words(self) -> str:
        return f'rotation frequency of cloud "{self.of}" about {self.axis} {self.when()}'


def shell_deviation(charges: Charges, axis: int) -> tuple[float, float]:
    """Rms of the shells' own rates about the whole one, and what chance makes of it, both in Hz."""
    a, b = across(axis)
    place = charges.position - charges.position.mean(axis=1, keepdims=True)
    seen = without_rotation(charges.position, charges.velocity, axis)
    square = place[a] ** 2 + place[b] ** 2
    turning = place[a] * seen[b] - place[b] * seen[a]
    apart, chance = [], []
    for shell in np.array_split(np.argsort(square, kind="stable"), _SHELLS):
        inertia = max(float(square[shell].sum()), 1e-300)
        apart.append(float(turning[shell].sum()) / inertia)
        chance.append(math.sqrt(turning[shell].size) * float(turning[shell].std()) / inertia)
    turn = 2.0 * math.pi
    return _rms(apart) / turn, _rms(chance) / turn


def _rms(values: list[float]) -> float:
    return math.sqrt(sum(value**2 for value in values) / len(values))
