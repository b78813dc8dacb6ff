"""Root mean square emittance in one plane.

    geometric:   sqrt(<x^2><x'^2> - <x x'>^2),  x' = u_x / u_b, b the axis of the beam        (1)
    normalised:  sqrt(<x^2><u_x^2> - <x u_x>^2) / c,  u the proper velocity                   (2)

All means are about the cloud's own. The difference of products is worked out as the product of
<x^2> and the spread of x' about the line that fits it best, since the products alone cancel to
rounding where a beam has drifted for long.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 5.3.4 (from memory).
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.form import AXES, Axis
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.errors import AnswerError
from driftwell.forms import TrueOrFalse, checked, key, refuse

Floats = NDArray[np.float64]

_PARAXIAL = 5.0
"""Mean over spread of the beam's velocity from which its moments give slopes."""


class Emittance(MomentQuestion):
    """Root mean square emittance of a cloud in one plane."""

    unit: ClassVar[str] = "m rad"
    ask: Literal["emittance"] = key("rms emittance in one plane")
    plane: Axis = key("the plane: that of this coordinate and its slope or velocity")
    beam_axis: Axis = key("axis the beam runs along; slopes are against it", default="z")
    normalised: TrueOrFalse = key(
        "true: with proper velocities over the speed of light; false: with slopes", default=False
    )

    @checked
    def _has_slopes(self) -> Self:
        if self.plane == self.beam_axis and not self.normalised:
            raise refuse(
                "`plane` must differ from `beam_axis`, along which there is no slope; or take "
                "normalised = true"
            )
        return self

    def least_charges(self) -> int:
        return 3

    def of_charges(self, charges: Charges) -> float:
        place = charges.position[AXES.index(self.plane)]
        across = charges.velocity[AXES.index(self.plane)]
        if self.normalised:
            return phase_area(place, across) / SPEED_OF_LIGHT
        along = charges.velocity[AXES.index(self.beam_axis)]
        if along.min() * along.max() <= 0.0:
            raise AnswerError(
                f"not every charge moves the same way along {self.beam_axis}, so slopes mean "
                "nothing; ask for normalised = true"
            )
        return phase_area(place, across / along)

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        i, j = AXES.index(self.plane), 3 + AXES.index(self.plane)
        square = moments.covariance[:, i, i]
        mixed = moments.covariance[:, i, j]
        rest = moments.covariance[:, j, j] - mixed**2 / np.where(square > 0.0, square, 1.0)
        area = np.sqrt(square * np.maximum(rest, 0.0))
        if self.normalised:
            return np.asarray(area / SPEED_OF_LIGHT)
        b = 3 + AXES.index(self.beam_axis)
        along = np.abs(moments.centre[:, b])
        if np.any(along < _PARAXIAL * np.sqrt(moments.covariance[:, b, b])):
            raise AnswerError(
                f"the velocities along {self.beam_axis} spread too widely for slopes from moments; "
                "ask at one time, or for normalised = true"
            )
        return np.asarray(area / along)

    def remark(self, centre: Floats) -> str:
        if self.normalised or self.over is None:
            return ""
        return "slopes are velocities over the cloud's mean, for lack of each charge's own"

    def words(self) -> str:
        which = "normalised" if self.normalised else "geometric"
        return f'{which} rms emittance of cloud "{self.of}" in {self.plane}, {self.when()}'


def phase_area(place: Floats, slope: Floats) -> float:
    """Root of the determinant of the covariance of two coordinates, eq. 1."""
    place = place - place.mean()
    slope = slope - slope.mean()
    square = float(np.mean(place**2))
    if square == 0.0:
        return 0.0
    rest = slope - place * (float(np.mean(place * slope)) / square)
    return math.sqrt(square * float(np.mean(rest**2)))
