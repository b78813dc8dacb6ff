"""The rms ellipse of charges in a plane of place and slope, or place and velocity, with weights.

    s11 = <x x>, s12 = <x y>, s22 = <y y>, about the mean, with weights
    emittance  e = sqrt(s11 s22 - s12^2),  beta = s11 / e,  alpha = -s12 / e,  gamma = s22 / e   (1)
    ellipse    gamma x^2 + 2 alpha x y + beta y^2 = e,   of area pi e                            (2)

This is the ellipse of one rms: it touches x = sqrt(s11) and y = sqrt(s22), and a Gaussian cloud has
39 % of its charges within. Determinants of long thin clouds lose digits where they are worked out
as written; here they come from the singular values of the scaled charges.

References
----------
H. Wiedemann, Particle Accelerator Physics (4th ed., 2015), section 8.1 (from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]

LEAST = 8
"""Fewer charges do not fill a plane."""
POINTS = 181


@dataclass(frozen=True, slots=True)
class RmsEllipse:
    """Eq. 1: centre (2,), covariance (2, 2), emittance; SI."""

    centre: Floats
    covariance: Floats
    emittance: float
    axes: Floats
    """(2, 2): the two semi-axes as columns; any pair of conjugate radii will do to draw it."""

    @property
    def twiss(self) -> tuple[float, float, float]:
        """alpha, beta, gamma."""
        s = self.covariance
        return (
            -float(s[0, 1]) / self.emittance,
            float(s[0, 0]) / self.emittance,
            float(s[1, 1]) / self.emittance,
        )

    def outline(self) -> Floats:
        """Points (2, POINTS) of eq. 2."""
        angle = np.linspace(0.0, 2.0 * math.pi, POINTS)
        circle = np.stack([np.cos(angle), np.sin(angle)])
        return np.asarray(self.centre[:, None] + self.axes @ circle)


def rms_ellipse(across: Floats, up: Floats, weight: Floats) -> RmsEllipse | None:
    """The ellipse of charges (n,); None where these are too few, or lie on a line."""
    if across.size < LEAST:
        return None
    part = weight / weight.sum()
    centre = np.array([part @ across, part @ up])
    apart = np.stack([across, up]) - centre[:, None]
    scale = np.sqrt(apart**2 @ part)
    if not np.all(scale > 0.0):
        return None
    turn, lengths, _ = np.linalg.svd(apart / scale[:, None] * np.sqrt(part), full_matrices=False)
    if lengths[1] <= 1e-9 * lengths[0]:
        return None
    axes = scale[:, None] * turn * lengths
    return RmsEllipse(centre, axes @ axes.T, float(np.prod(lengths) * np.prod(scale)), axes)
