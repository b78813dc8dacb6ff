"""Two plates as a table tells of them, and places of charges between them in lengths of the gap."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import inner_kernel

Floats = NDArray[np.float64]

HEAD = 14
"""Numbers of a frame: a point of the first plate, m; the normal towards the second; the gap, m; s,
m; two directions along the plates."""


def frame_of(point: Floats, normal: Floats, gap: float, blur: float) -> Floats:
    """(HEAD,) the frame of plates, from unit vector `normal`; lengths in m."""
    least = np.zeros(3)
    least[np.argmin(np.abs(normal))] = 1.0
    one = np.cross(normal, least)
    one /= np.linalg.norm(one)
    return np.concatenate([point, normal, [gap, blur], one, np.cross(normal, one)])


@inner_kernel
def height(position: np.ndarray, frame: np.ndarray, i: int) -> float:
    """How high a charge is over the first plate, in gaps."""
    result: float = (
        frame[3] * (position[0, i] - frame[0])
        + frame[4] * (position[1, i] - frame[1])
        + frame[5] * (position[2, i] - frame[2])
    ) / frame[6]
    return result


@inner_kernel
def lateral(position: np.ndarray, frame: np.ndarray, i: int) -> tuple[float, float]:
    """Place of a charge along the plates, in gaps."""
    dx, dy, dz = position[0, i] - frame[0], position[1, i] - frame[1], position[2, i] - frame[2]
    d = frame[6]
    return (
        (frame[8] * dx + frame[9] * dy + frame[10] * dz) / d,
        (frame[11] * dx + frame[12] * dy + frame[13] * dz) / d,
    )
