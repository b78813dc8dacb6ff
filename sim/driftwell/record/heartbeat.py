"""The sign of life of a run: how far it is, in a small file beside its record.

`progress.json` is replaced as a whole every two seconds or so, and once at the end of the run. It
is no part of the record: it is not forced to disk, a run that cannot write it goes on without, and
nothing of the run is taken from it. All waiting is measured by a clock that only goes forward; the
time of day, which may be set back, is written down and never reckoned with here.
"""

from __future__ import annotations

import json
import math
import os
import platform
import time as clocks
from collections.abc import Callable
from contextlib import suppress
from dataclasses import asdict, dataclass, fields
from pathlib import Path
from typing import Any, Protocol

from driftwell.errors import RecordError
from driftwell.record.commit import PART

PROGRESS_FILE = "progress.json"
EVERY = 2.0
"""s, the shortest time between two signs of life."""
_DEAD = {b"Z", b"X"}
"""States of a process that has ended, and of which only its number is left."""
_LARGEST = 100_000
"""Bytes of a file that can be a sign of life."""


class Reached(Protocol):
    """How far a run is; see :class:`driftwell.run.Progress`."""

    @property
    def time(self) -> float:
        """s of the motion followed."""

    @property
    def duration(self) -> float:
        """s to be followed in all."""

    @property
    def steps(self) -> int:
        """Steps taken."""

    @property
    def all_steps(self) -> int:
        """Steps of the whole run."""

    @property
    def alive(self) -> int:
        """Simulated charges that are left."""

    @property
    def born(self) -> int:
        """Simulated charges there ever were."""

    @property
    def energy_residual(self) -> float:
        """Relative, at the last record."""


@dataclass(frozen=True, slots=True)
class Sign:
    """What a run wrote last of how far it is.

    time, duration : s; steps, all_steps; alive, born : simulated charges
    energy_residual : relative, at the last record; None where it is not a number
    outcome, sentence : how the run ended; empty while it goes on
    process, host : number of the process, and the machine's name
    mark : what tells that process from a later one of the same number, see :func:`process_mark`
    start, stamp : time of day (Unix, s) of the first sign and of this one
    stepping : s by the clock since the first sign
    gap : s, the longest time between two signs so far
    left : s that the run will still take at its present pace; None where that is not known
    """

    time: float
    duration: float
    steps: int
    all_steps: int
    alive: int
    born: int
    energy_residual: float | None
    outcome: str
    sentence: str
    process: int
    host: str
    mark: str
    start: float
    stamp: float
    stepping: float
    gap: float
    left: float | None


class Heartbeat:
    """Writes the sign of life of one run; nothing that goes wrong with it reaches the run."""

    def __init__(
        self,
        folder: Path,
        clock: Callable[[], float] = clocks.monotonic,
        day: Callable[[], float] = clocks.time,
    ) -> None:
        """Signs of life into `folder`; `clock` only goes forward, `day` is the time of day."""
        self._path = folder / PROGRESS_FILE
        self._clock, self._day = clock, day
        self._began: float | None = None
        self._start, self._last, self._gap = 0.0, 0.0, 0.0
        self._first_step = 0
        self._process, self._host = os.getpid(), platform.node()
        self._mark = process_mark(self._process)

    def beats(self, reached: Reached) -> None:
        """Write how far the run is, where the last time is :data:`EVERY` ago."""
        now = self._clock()
        if self._began is None:
            self._begin(reached, now)
        elif now - self._last < EVERY:
            return
        self._write(reached, now, "", "")

    def ends(self, reached: Reached, outcome: str, sentence: str) -> None:
        """Write how the run ended."""
        now = self._clock()
        if self._began is None:
            self._begin(reached, now)
        self._write(reached, now, outcome, sentence)

    def _begin(self, reached: Reached, now: float) -> None:
        self._began = self._last = now
        self._start, self._first_step = self._day(), reached.steps

    def _write(self, reached: Reached, now: float, outcome: str, sentence: str) -> None:
        began = now if self._began is None else self._began
        self._gap, self._last = max(self._gap, now - self._last), now
        sign = Sign(
            time=reached.time,
            duration=reached.duration,
            steps=reached.steps,
            all_steps=reached.all_steps,
            alive=reached.alive,
            born=reached.born,
            energy_residual=_finite(reached.energy_residual),
            outcome=outcome,
            sentence=sentence,
            process=self._process,
            host=self._host,
            mark=self._mark,
            start=self._start,
            stamp=self._day(),
            stepping=now - began,
            gap=self._gap,
            left=0.0 if outcome else self._left(reached, now - began),
        )
        part = self._path.with_name(self._path.name + PART)
        with suppress(OSError, ValueError):  # ValueError: a null character in the name
            try:
                part.write_text(json.dumps(asdict(sign), indent=1) + "\n", encoding="utf-8")
                part.replace(self._path)
            except OSError:
                part.unlink(missing_ok=True)
                raise

    def _left(self, reached: Reached, stepping: float) -> float | None:
        """Seconds to the end at the pace of this process, without what was done before a resume."""
        done = reached.steps - self._first_step
        if done <= 0 or stepping <= 0.0:
            return None
        return _finite(stepping * (reached.all_steps - reached.steps) / done)


def read_sign(folder: Path) -> Sign | None:
    """What the run in `folder` wrote last; None where it wrote nothing yet.

    Raises RecordError where the file cannot be read or is not what a run writes.
    """
    path = folder / PROGRESS_FILE
    try:
        with path.open("rb") as file:
            text = file.read(_LARGEST)
    except FileNotFoundError:
        return None
    except OSError as fault:
        raise RecordError(
            f"{path}: cannot be read ({fault.strerror}). It says how far the run is, and nothing "
            "else depends on it."
        ) from fault
    try:
        return _sign(json.loads(text))
    except (ValueError, TypeError, RecursionError) as fault:
        raise RecordError(
            f"{path}: damaged, or not written by a run. It says how far the run is, and nothing "
            "else depends on it: remove it; a run that goes on writes it again."
        ) from fault


def process_mark(process: int) -> str:
    """Text that tells a process from any later one with its number; empty where none is known.

    It names the machine's present start-up and the process's own: both from Linux's /proc.
    """
    with suppress(OSError, IndexError):
        boot = Path("/proc/sys/kernel/random/boot_id").read_text(encoding="ascii").strip()
        # the name of the program, in brackets, may hold anything; field 22 is counted behind it
        words = Path(f"/proc/{process}/stat").read_bytes().rpartition(b")")[2].split()
        if words[0] not in _DEAD:
            return f"{boot} {int(words[19])}"
    return ""


def _finite(number: float) -> float | None:
    """The number, or None where JSON has no word for it."""
    return float(number) if math.isfinite(number) else None


def _sign(found: Any) -> Sign:
    """The sign in a table read from a file; what it does not know is passed by."""
    if not isinstance(found, dict):
        raise TypeError("not a table")
    values: dict[str, Any] = {}
    for each in fields(Sign):
        value = found.get(each.name)
        if not _fits(value, str(each.type)):
            raise TypeError(each.name)
        values[each.name] = value
    return Sign(**values)


def _fits(value: Any, kind: str) -> bool:
    """Whether a value read from a file is of a field's type."""
    if value is None:
        return "None" in kind
    if kind == "str":
        return isinstance(value, str)
    if kind == "int":
        return type(value) is int and value >= 0
    return type(value) in {int, float} and math.isfinite(value)
