"""What checks read from a run beyond its answers: tracks, ledger, moments."""

from __future__ import annotations

import math

import numpy as np
from numpy.typing import NDArray

from driftwell.record.reader import Run
from validation.case import Reader, Reading

Floats = NDArray[np.float64]


def at_end(charge: int, column: int, scale: float = 1.0, less: float = 0.0) -> Reader:
    """Coordinate (0 to 2) or proper velocity (3 to 5) of a tracked charge at the end."""

    def read(run: Run) -> Reading:
        return Reading(scale * (float(run.track(charge)[1][-1, column]) - less))

    return read


def ledger_at_start(column: str, scale: float) -> Reader:
    """A column of the account at time zero."""

    def read(run: Run) -> Reading:
        return Reading(scale * float(run.ledger[column][0]))

    return read


def angle_at_end(first: int, second: int) -> Reader:
    """Angle between the relative velocities of two tracked charges at start and end, degrees."""

    def read(run: Run) -> Reading:
        moving = run.track(second)[1][:, 3:] - run.track(first)[1][:, 3:]
        a, b = moving[0], moving[-1]
        turned = math.atan2(float(np.linalg.norm(np.cross(a, b))), float(a @ b))
        return Reading(math.degrees(turned))

    return read
