"""How bodies stand in space: a centre, an axis, and a turn about it."""

from __future__ import annotations

import math

import numpy as np

from driftwell.forms import spelled
from driftwell.geometry.solid import Frame

Three = tuple[float, float, float]
UPRIGHT: Three = (0.0, 0.0, 1.0)
AXIS = "direction of the body's own z axis; any length but 0"
TURN = (
    "turn of the body about its axis; without it its own x lies as far along x as the axis "
    "allows, and along y where the axis is x"
)


def placed(centre: Three, axis: Three, turn: float = 0.0) -> Frame:
    """The frame of a body about `centre`, m, with the axis of length 1; turn in rad."""
    own_z = np.array(axis)
    beside = np.array([1.0, 0.0, 0.0] if abs(axis[0]) < 1.0 - 1e-9 else [0.0, 1.0, 0.0])
    own_x = beside - own_z * float(np.dot(beside, own_z))
    own_x /= float(np.linalg.norm(own_x))
    own_y = np.cross(own_z, own_x)
    if turn != 0.0:
        c, s = math.cos(turn), math.sin(turn)
        own_x, own_y = c * own_x + s * own_y, c * own_y - s * own_x
    return Frame(np.array(centre), np.stack([own_x, own_y, own_z]))


def about(centre: Three, axis: Three | None = None) -> str:
    """Centre and axis in words."""
    place = ", ".join(spelled(x, "m") for x in centre)
    if axis is None or axis == UPRIGHT:
        return f"about ({place})"
    return f"about ({place}) along ({', '.join(f'{x:g}' for x in axis)})"
