"""Splitting schemes: kicks and drifts in palindromic order, as rows of one table.

A step of length h is kick(b_0 h) drift(c_0 h) kick(b_1 h) drift(c_1 h) ... kick(b_s h). All are
compositions of kick-drift-kick, so they are symmetric in time; the kick takes the forces of the
fields and of the charges at the time of its node, the drift is exact in a uniform magnetic field.
In midpoint-rotation the drift is straight, and magnets act in its one kick, in the middle
(midpoint_rotation.py).

References
----------
kick-drift-kick: L. Verlet, Phys. Rev. 159 (1967) 98, in its velocity form; order 2.
composed-4: M. Suzuki, Phys. Lett. A 146 (1990) 319, five-fold composition; order 4.
composed-6: H. Yoshida, Phys. Lett. A 150 (1990) 262, table 1, solution A; order 6 (coefficients
from memory; the fitted order in tests/order confirms them).
midpoint-rotation: A. V. Higuera and J. R. Cary, Phys. Plasmas 24 (2017) 052104; order 2.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray


class Scheme(NamedTuple):
    """One splitting for compiled code.

    kick : (s + 1,) float64, b; drift : (s,) float64, c; node : (s + 1,) float64, the fraction of
    the step behind each kick.
    """

    kick: NDArray[np.float64]
    drift: NDArray[np.float64]
    node: NDArray[np.float64]


def _composed(drift: tuple[float, ...]) -> Scheme:
    """Kick-drift-kick pieces of lengths `drift`, neighbouring kicks merged."""
    c = np.array(drift)
    b = 0.5 * (np.append(c, 0.0) + np.append(0.0, c))
    node = np.append(0.0, np.cumsum(c))
    node[-1] = 1.0
    return Scheme(b, c, node)


def _suzuki() -> tuple[float, ...]:
    p = 1.0 / (4.0 - 4.0 ** (1.0 / 3.0))
    return p, p, 1.0 - 4.0 * p, p, p


def _yoshida() -> tuple[float, ...]:
    w1, w2, w3 = -1.17767998417887, 0.235573213359357, 0.784513610477560
    w0 = 1.0 - 2.0 * (w1 + w2 + w3)
    return w3, w2, w1, w0, w1, w2, w3


MIDWAY = "midpoint-rotation"
ORDER = {"kick-drift-kick": 2, "composed-4": 4, "composed-6": 6, MIDWAY: 2}
SCHEMES = {
    "kick-drift-kick": _composed((1.0,)),
    "composed-4": _composed(_suzuki()),
    "composed-6": _composed(_yoshida()),
    MIDWAY: Scheme(np.array([0.0, 1.0, 0.0]), np.array([0.5, 0.5]), np.array([0.0, 0.5, 1.0])),
}
