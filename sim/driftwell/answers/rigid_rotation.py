"""Rigid rotation of a cloud about an axis through its centre.

    omega = sum of (a v_b - b v_a) / sum of (a^2 + b^2)                                       (1)

a, b are the two coordinates across the axis in right-handed order, v_a, v_b their velocities, all
about the cloud's means. It is the rate whose rigid rotation leaves the least kinetic energy, and
the one that carries the whole angular momentum of equal masses.

References
----------
H. Goldstein, C. Poole, J. Safko, Classical Mechanics, 3rd ed. (2002), sec. 5.1 (angular momentum
of a rigid rotor; from memory).
"""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


def across(axis: int) -> tuple[int, int]:
    """The two axes across `axis` in right-handed order: y and z for x."""
    return (axis + 1) % 3, (axis + 2) % 3


def rigid_rate(position: Floats, velocity: Floats, axis: int) -> float:
    """Rate, rad/s, of positions and velocities (3, n), eq. 1; 0 where all lie on the axis."""
    a, b = across(axis)
    place = position - position.mean(axis=1, keepdims=True)
    moving = velocity - velocity.mean(axis=1, keepdims=True)
    inertia = float(np.sum(place[a] ** 2 + place[b] ** 2))
    if inertia == 0.0:
        return 0.0
    return float(np.sum(place[a] * moving[b] - place[b] * moving[a])) / inertia


def without_rotation(position: Floats, velocity: Floats, axis: int) -> Floats:
    """Velocities (3, n) about their mean, as seen by one who turns with the cloud."""
    a, b = across(axis)
    rate = rigid_rate(position, velocity, axis)
    place = position - position.mean(axis=1, keepdims=True)
    seen: Floats = velocity - velocity.mean(axis=1, keepdims=True)
    seen[a] += rate * place[b]
    seen[b] -= rate * place[a]
    return seen
