"""Tune from the second moments of a cloud: how fast its phase-space ellipse turns.

    phase rate = sqrt(<x^2><x'^2> - <x x'>^2) / <x^2> = e / <x^2>                             (1)
    tune       = phase rate times the period / (2 pi)                                          (2)

x' is the slope where the period is a length along the beam, the velocity where it is a time; all
means are about the cloud's own. Eq. 1 is the local rate 1/beta of the phase advance of the beam
with the same rms sizes and emittance in linear fields, its own charge's included: averaged over
whole periods (`over`) it gives the phase advance of the matched beam depressed by its charge. It
is exact for a uniform beam of Kapchinskij and Vladimirskij; for others it is a mean that no single
charge need have. Where sizes swing fast (the quiver in an alternating field) records must lie close
enough to see it.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.4 and 5.3.4; F. J. Sacherer,
IEEE Trans. Nucl. Sci. NS-18 (1971) 1105 (equivalent beams). From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.form import AXES, Axis
from driftwell.answers.kinds.emittance import phase_area
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.answers.kinds.tune import one_period, period_in_words
from driftwell.constants import SPEED_OF_LIGHT
from driftwell.errors import AnswerError
from driftwell.forms import Length, Positive, Time, checked, key

Floats = NDArray[np.float64]


class EnvelopeTune(MomentQuestion):
    """Turns of the rms ellipse of a cloud in a period of the focusing."""

    unit: ClassVar[str] = "1"
    ask: Literal["envelope-tune"] = key(
        "oscillations in a period of the focusing, from sizes and emittance"
    )
    axis: Axis = key("axis of the oscillation")
    period: Positive[Time] | None = key(
        "the period, in time; give this or `length`", default=None, example="1 us"
    )
    length: Positive[Length] | None = key(
        "the period, as a length along the beam", default=None, example="0.4 m"
    )
    beam_axis: Axis = key("axis the beam runs along, for `length`", default="z")

    @checked
    def _one_period(self) -> Self:
        one_period(self.period, self.length, self.axis != self.beam_axis)
        return self

    def least_charges(self) -> int:
        return 3

    def of_charges(self, charges: Charges) -> float:
        place = charges.position[AXES.index(self.axis)]
        moving = charges.velocity[AXES.index(self.axis)]
        rate = phase_area(place, moving) / _not_zero(float(np.var(place)))
        return float(rate * self._turns(charges.velocity.mean(axis=1)))

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        i, j = AXES.index(self.axis), 3 + AXES.index(self.axis)
        square = moments.covariance[:, i, i]
        _not_zero(float(square.min()))
        mixed = moments.covariance[:, i, j]
        rest = np.maximum(moments.covariance[:, j, j] - mixed**2 / square, 0.0)
        turns = np.array([self._turns(mean) for mean in moments.centre[:, 3:]])
        return np.asarray(np.sqrt(rest / square) * turns)

    def _turns(self, mean: Floats) -> float:
        """What takes a rate of proper velocity over size to turns, from the mean velocity (3,)."""
        if self.period is not None:
            gamma = math.sqrt(1.0 + float(mean @ mean) / SPEED_OF_LIGHT**2)
            return self.period / (2.0 * math.pi * gamma)
        along = abs(float(mean[AXES.index(self.beam_axis)]))
        if along == 0.0:
            raise AnswerError(f"the cloud does not move along {self.beam_axis}")
        return (self.length or 0.0) / (2.0 * math.pi * along)

    def words(self) -> str:
        return (
            f'tune of cloud "{self.of}" along {self.axis} from its sizes and emittance, in a '
            f"period of {period_in_words(self.period, self.length, self.beam_axis)}, {self.when()}"
        )


def _not_zero(square: float) -> float:
    if square <= 0.0:
        raise AnswerError("the cloud has no size")
    return square
