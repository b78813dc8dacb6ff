"""Temperature of a cloud: the spread of its velocities about its mean velocity.

    T_a = m var(v_a) / k_B,   var divided by n - 1                                          (1)

v is the velocity seen in the frame that moves with the cloud's mean, in which thermal motion is
slow against light: transverse to the mean motion it is the lab's proper velocity, along it the
lab's proper velocity divided by the Lorentz factor of the mean,

    v' = (1 - (1 - 1/Gamma) d d^T) (u - <u>),   d the direction of <u>                      (2)

Only the mean velocity of the whole cloud is taken out. Whatever else is ordered in the motion
counts as temperature: rotation, breathing, the quiver of an alternating drive, a velocity that
grows along a spreading pulse.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sec. 11.4 (addition of velocities, to
first order in the slow one; from memory). Good to first order in thermal speed over that of light.
"""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import Charges
from driftwell.answers.evidence import CloudFacts, Moments
from driftwell.answers.form import AXES
from driftwell.answers.kinds.moment_question import MomentQuestion
from driftwell.constants import BOLTZMANN, SPEED_OF_LIGHT
from driftwell.forms import key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


class Temperature(MomentQuestion):
    """Temperature of a cloud along one axis, or the mean of the three."""

    unit: ClassVar[str] = "K"
    ask: Literal["temperature"] = key("temperature, about the cloud's mean velocity")
    axis: Literal["x", "y", "z", "mean"] = key(
        'the axis, or "mean": the mean of the three', default="mean"
    )

    def of_charges(self, charges: Charges) -> float:
        mean = charges.velocity.mean(axis=1)
        apart = np.einsum("ij,jn->in", to_moving_frame(mean), charges.velocity - mean[:, None])
        degrees = len(charges) - 1
        variance = np.array([np.sum(component**2) / degrees for component in apart])
        return float(charges.cloud.mass / BOLTZMANN * self._chosen(variance[None])[0])

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        turn = to_moving_frame(moments.centre[:, 3:])
        seen = turn @ moments.covariance[:, 3:, 3:] @ np.swapaxes(turn, -1, -2)
        variance = np.diagonal(seen, axis1=-2, axis2=-1)
        unbiased = moments.count / (moments.count - 1.0)
        return np.asarray(cloud.mass / BOLTZMANN * unbiased * self._chosen(variance))

    def _chosen(self, variance: Floats) -> Floats:
        """The axis asked for, or the mean, of variances (k, 3)."""
        if self.axis == "mean":
            return np.asarray(variance.mean(axis=1))
        return variance[:, AXES.index(self.axis)]

    def remark(self, centre: Floats) -> str:
        speed = float(np.linalg.norm(centre[3:]))
        return (
            f"about the mean velocity ({spelled(speed, 'm/s', 4)}); rotation, breathing and "
            "driven quiver count as heat"
        )

    def words(self) -> str:
        which = "mean of three axes" if self.axis == "mean" else f"along {self.axis}"
        return f'temperature of cloud "{self.of}", {which}, {self.when()}'


def to_moving_frame(mean: Floats) -> Floats:
    """Matrices (..., 3, 3) of eq. 2 for mean proper velocities (..., 3) in m/s."""
    square = np.sum(mean**2, axis=-1)[..., None, None]
    gamma = np.sqrt(1.0 + square / SPEED_OF_LIGHT**2)
    # (1 - 1/gamma) / u^2, written so that it neither cancels nor divides by a mean at rest.
    shrink = 1.0 / (SPEED_OF_LIGHT**2 * gamma * (gamma + 1.0))
    return np.asarray(np.eye(3) - shrink * mean[..., :, None] * mean[..., None, :])
