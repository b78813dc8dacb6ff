"""Where a cloud is and how large: mean and rms of one coordinate of its charges.

The rms size is about the cloud's own mean, divided by the number of charges: that of a string of
ions is the rms of their distances from the middle.
"""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.form import AXES, Axis
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.answers.sampling import mean_error
from driftwell.forms import key

Floats = NDArray[np.float64]


class Centre(MomentQuestion):
    """Mean position of a cloud's charges along one axis."""

    unit: ClassVar[str] = "m"
    ask: Literal["centre"] = key("mean position along an axis")
    axis: Axis = key("the axis")

    def least_charges(self) -> int:
        return 1

    def of_charges(self, charges: Charges) -> float:
        return float(charges.position[AXES.index(self.axis)].mean())

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        return moments.centre[:, AXES.index(self.axis)]

    def error_of(self, charges: Charges) -> float | None:
        return mean_error(charges.position[AXES.index(self.axis)])

    def words(self) -> str:
        return f'centre of cloud "{self.of}" along {self.axis} {self.when()}'


class RmsSize(MomentQuestion):
    """Root mean square distance of a cloud's charges from its centre, along one axis."""

    unit: ClassVar[str] = "m"
    ask: Literal["rms-size"] = key("rms size along an axis, about the centre")
    axis: Axis = key("the axis")

    def of_charges(self, charges: Charges) -> float:
        return float(charges.position[AXES.index(self.axis)].std())

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        axis = AXES.index(self.axis)
        return np.asarray(np.sqrt(moments.covariance[:, axis, axis]))

    def words(self) -> str:
        return f'rms size of cloud "{self.of}" along {self.axis} {self.when()}'
