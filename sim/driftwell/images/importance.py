"""How much images would matter: their push on a cloud against the cloud's own, estimated.

Each charge is taken to face a plane at its own distance d_i from the nearest conductor. The push of
all images on it is then

    E_i = K sum_j q_j (d_i + d_j) / (|x_i - x_j|^2 + 4 d_i d_j)^(3/2)                       (1)

exact for one plane; where conductors lie on all sides their pushes partly cancel, and it is more
than there is. It is set against the mean field at the surface of the evenly filled ellipsoid of the
cloud's charge and rms sizes,

    E = Q / (eps0 S),   semi-axes 5^(1/2) sigma                                             (2)

and against what it does in the run: a free charge moves by Q/m E T^2 / 2 in a time T.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sections 1.3 and 2.1. Area of an ellipsoid
to 1.1 %: K. Thomsen's formula (from memory). The judgement: common practice, no source.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT
from driftwell.forms import spelled

Floats = NDArray[np.float64]
Distance = Callable[[Floats], Floats]
"""Distances (n,), m, of points (n, 3) from the nearest conductor, positive in free space."""

SHARE = 0.01
"""Of the charges' own push, what images must reach to be spoken of."""
_LOOKED_AT = 300
_FLAT = 1e-3
_POWER = 1.6075


@dataclass(frozen=True, slots=True)
class Importance:
    """What images would do to a cloud, about.

    name : of the cloud
    distance : m, mean distance from the nearest conductor
    size : m, rms distance of a charge from the centre
    image : V/m, rms push of the images, eq. (1)
    own : V/m, push of the cloud at its surface, eq. (2); 0 of a single charge
    shift : m, what a free charge would move by the images in the run
    """

    name: str
    distance: float
    size: float
    image: float
    own: float
    shift: float

    @property
    def share(self) -> float:
        """Images' push over the cloud's own; infinite where it has none."""
        return self.image / self.own if self.own > 0.0 else math.inf

    def matters(self, share: float = SHARE) -> bool:
        """Whether images push with so much of the own push, and move what they push.

        What moves by less than this share of its size and distance in the whole run does not.
        """
        length = max(self.size, share * self.distance)
        return self.share > share and self.shift > share * length


def importance(
    name: str,
    position: Floats,
    charge: Floats,
    mass: Floats,
    distance: Distance,
    duration: float,
) -> Importance:
    """How much images would matter to one cloud as it begins.

    position : (3, n) m; charge : (n,) C and mass : (n,) kg, of the macro-charges
    distance : see :data:`Distance`; duration : s
    """
    n = charge.size
    chosen = np.unique(np.linspace(0, n - 1, min(n, _LOOKED_AT)).round().astype(np.int64))
    places, some = position[:, chosen].T, charge[chosen] * (n / chosen.size)
    away = np.maximum(np.asarray(distance(places), dtype=np.float64), 0.0)
    apart = np.linalg.norm(places[:, None, :] - places[None, :, :], axis=2)
    mirrored2 = apart**2 + 4.0 * away[:, None] * away[None, :]
    least = float(away[away > 0.0].min(initial=math.inf))
    mirrored2 = np.maximum(mirrored2, least**2 if math.isfinite(least) else 1.0)
    pushes = ((away[:, None] + away[None, :]) / mirrored2**1.5) @ some
    image = COULOMB_CONSTANT * float(np.sqrt(np.mean(pushes**2)))
    sigma = np.std(position, axis=1)
    ratio = float(np.max(np.abs(charge / mass)))
    return Importance(
        name=name,
        distance=float(away.mean()),
        size=float(np.linalg.norm(sigma)),
        image=image,
        own=_own(sigma, float(abs(charge.sum()))) if n > 1 else 0.0,
        shift=0.5 * ratio * image * duration**2,
    )


def _own(sigma: Floats, charge: float) -> float:
    """Eq. (2), V/m."""
    axes = math.sqrt(5.0) * np.maximum(sigma, _FLAT * sigma.max())
    a, b, c = axes.tolist()
    mean = ((a * b) ** _POWER + (b * c) ** _POWER + (c * a) ** _POWER) / 3.0
    area = mean ** (1.0 / _POWER)
    return COULOMB_CONSTANT * charge / area if area > 0.0 else 0.0


def remark(estimates: Sequence[Importance], on: bool, share: float = SHARE) -> str | None:
    """What the user should be told of images that are left out, or taken without need; or nothing.

    on : whether the scenario has them
    share : of the charges' own push, from which images matter
    """
    if not estimates:
        return None
    if on:
        if any(each.matters(0.1 * share) for each in estimates):
            return None
        most = max(each.share for each in estimates)
        amount = "" if math.isinf(most) else f", about {most:.1g} of the charges' own push,"
        return (
            f"Images make next to no difference here{amount} and cost time: [images] may be left "
            "out."
        )
    mattering = [each for each in estimates if each.matters(share)]
    if not mattering:
        return None
    worst = max(mattering, key=lambda each: (each.share, each.shift))
    against = (
        "and nothing else of its own"
        if math.isinf(worst.share)
        else f"about {100.0 * worst.share:.2g} % of its own push at its edge"
    )
    return (
        f'Images are left out: conductors {spelled(worst.distance, "m", 2)} from "{worst.name}" '
        f"would pull it with {spelled(worst.image, 'V/m', 2)}, {against}, and move a free charge "
        f"by up to {spelled(worst.shift, 'm', 2)} in the run. See [images]."
    )
