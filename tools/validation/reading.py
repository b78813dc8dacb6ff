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


def closest(first: int, second: int) -> tuple[Reader, Reader]:
    """Least distance of two tracked charges and when it is, by Hermite's cubic through the
    records on either side of it."""

    def found(run: Run, every: int) -> tuple[float, float]:
        time, one = (part[::every] for part in run.track(first))
        other = run.track(second)[1][::every]
        apart = one[:, :3] - other[:, :3]
        moving = one[:, 3:] - other[:, 3:]
        distance = np.sqrt((apart**2).sum(axis=1))
        rate = (apart * moving).sum(axis=1) / distance
        k = int(np.argmin(distance))
        k = k - 1 if rate[k] > 0.0 else k
        step = time[k + 1] - time[k]
        a, b = distance[k], distance[k + 1]
        p, q = rate[k] * step, rate[k + 1] * step
        cubic = np.array([2 * a + p - 2 * b + q, -3 * a - 2 * p + 3 * b - q, p, a])
        roots = np.roots(np.polyder(cubic))
        inside = [float(s.real) for s in roots if abs(s.imag) < 1e-12 and 0.0 <= s.real <= 1.0]
        s = min(inside, key=lambda each: float(np.polyval(cubic, each)))
        return float(np.polyval(cubic, s)), float(time[k] + s * step)

    def reader(k: int) -> Reader:
        """What leaving out every second record changes is no less than the cubic's error."""

        def read(run: Run) -> Reading:
            value = found(run, 1)[k]
            return Reading(value, abs(value - found(run, 2)[k]))

        return read

    return reader(0), reader(1)


def angle_at_end(first: int, second: int) -> Reader:
    """Angle between the relative velocities of two tracked charges at start and end, degrees."""

    def read(run: Run) -> Reading:
        moving = run.track(second)[1][:, 3:] - run.track(first)[1][:, 3:]
        a, b = moving[0], moving[-1]
        turned = math.atan2(float(np.linalg.norm(np.cross(a, b))), float(a @ b))
        return Reading(math.degrees(turned))

    return read
