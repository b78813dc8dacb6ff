"""A traced coordinate as long as there was something to follow."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import Evidence, TraceRequest
from driftwell.errors import AnswerError
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Followed:
    """Samples (n,), s and m, in one piece; `lost` : it was lost before the run ended."""

    time: Floats
    value: Floats
    lost: bool

    @property
    def length(self) -> float:
        """What the samples stand for, s: their number times their spacing."""
        if self.time.size < 2:
            return 0.0
        return float(self.time[-1] - self.time[0]) * self.time.size / (self.time.size - 1)

    def words(self) -> str:
        """How many samples, over how long."""
        said = f"{self.time.size} samples in {spelled(self.length, 's', 4)}"
        return f"{said}, until it was lost" if self.lost else said


def followed(evidence: Evidence, request: TraceRequest) -> Followed:
    """The coordinate, from its first sample on until it was lost.

    Raises AnswerError where it was never there.
    """
    time, value = evidence.trace(request)
    good = np.isfinite(value)
    if not good.any():
        raise AnswerError(f"there was no charge to follow: {whose(request)} was lost at once")
    first = int(good.argmax())
    rest = good[first:]
    last = first + (int(rest.size) if rest.all() else int(rest.argmin()))
    return Followed(time[first:last], value[first:last], last < good.size)


def whose(request: TraceRequest) -> str:
    """What is traced, in words, without its axis."""
    if request.charge is None:
        return f'the centre of cloud "{request.cloud}"'
    return f'charge {request.charge} of cloud "{request.cloud}"'
