"""What of a run is to be exported: which of its parts, and which times of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.errors import RecordError
from driftwell.exports.names import TABLES
from driftwell.forms import Time, read_quantity
from driftwell.record.reader import TIME_TOLERANCE, Run

BETWEEN = ".."
"""Between the ends of a stretch of time, such as ``10 us..20 us``."""


@dataclass(frozen=True, slots=True)
class Times:
    """Stretches of time, both ends included, s; none of them: all times."""

    stretches: tuple[tuple[float, float], ...] = ()

    def taken(self, time: NDArray[np.float64]) -> NDArray[np.bool_]:
        """Which of some times, s, are among them."""
        if not self.stretches:
            return np.ones(time.shape, np.bool_)
        taken = np.zeros(time.shape, np.bool_)
        for first, last in self.stretches:
            taken |= (first <= time) & (time <= last)
        return taken


@dataclass(frozen=True, slots=True)
class Wanted:
    """What to export; `what` : names of :data:`TABLES`, none: what is usual of the format.

    author : who answers for the data, name and address; empty: nobody is named
    """

    what: tuple[str, ...] = ()
    times: Times = Times()
    author: str = ""


def times_of(run: Run, texts: Sequence[str | float]) -> Times:
    """Times as a user gives them: ``start``, ``end``, ``"20 us"``, ``"10 us..20 us"``, or s.

    One time stands for what was recorded at it, to a billionth of the duration. Raises RecordError.
    """
    near = TIME_TOLERANCE * run.header.duration
    found = []
    for text in texts:
        first, between, last = text.partition(BETWEEN) if isinstance(text, str) else (text, "", "")
        begin = _time(run, first)
        end = _time(run, last) if between else begin
        if end < begin:
            raise RecordError(
                f'times: "{text}" ends before it begins; needs the earlier time first.'
            )
        found.append((begin - near, end + near))
    return Times(tuple(found))


def names_of(what: Sequence[str]) -> tuple[str, ...]:
    """The names, each once; raises RecordError where one is not known."""
    for name in what:
        if name not in TABLES:
            raise RecordError(f'what: "{name}" is not known; needs some of {", ".join(TABLES)}.')
    return tuple(dict.fromkeys(what))


def _time(run: Run, text: str | float) -> float:
    if isinstance(text, str) and text.strip() in ("start", "end"):
        return 0.0 if text.strip() == "start" else run.end_time
    try:
        return read_quantity(Time, text) if isinstance(text, str) else float(text)
    except (ValueError, TypeError) as fault:
        raise RecordError(
            f'times: "{text}" is not a time ({fault}); needs start, end, a time such as "20 us", '
            f'or a stretch such as "10 us{BETWEEN}20 us".'
        ) from fault
