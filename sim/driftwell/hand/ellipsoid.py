"""The uniform ellipsoid in a harmonic well: how flat it is, and how much it holds.

The push of a uniform ellipsoid of charge is linear, with shares L_x + L_y + L_z = 1 of n q/eps0.
At rest in a well of stiffness k_i it fills itself so that

    n q^2 / (eps0 m) = k_x + k_y + k_z,   L_i = k_i / (k_x + k_y + k_z)                      (1)

    L_z = a^2 c R_D(a^2, a^2, c^2) / 3   for a spheroid of semi-axes a, a, c                 (2)

References
----------
O. D. Kellogg, Foundations of Potential Theory (1929), ch. 7; D. H. E. Dubin, T. M. O'Neil, Rev.
Mod. Phys. 71 (1999) 87; R_D: DLMF 19.16. From memory.
"""

from __future__ import annotations

import math

_HALVINGS = 60
_FLATTEST = 1e-4


def share_along(aspect: float) -> float:
    """L_z of equation (2); aspect : c / a."""
    from scipy.special import elliprd

    return float(aspect * elliprd(1.0, 1.0, aspect**2) / 3.0)


def aspect_of(share: float) -> float | None:
    """c / a of the spheroid with this L_z; None where it is flatter, or longer, than 10 000."""
    low, high = math.log(_FLATTEST), -math.log(_FLATTEST)
    if not share_along(math.exp(high)) < share < share_along(math.exp(low)):
        return None
    for _ in range(_HALVINGS):
        middle = 0.5 * (low + high)
        if share_along(math.exp(middle)) > share:
            low = middle
        else:
            high = middle
    return math.exp(0.5 * (low + high))
