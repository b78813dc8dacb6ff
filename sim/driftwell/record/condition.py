"""What has become of a run, as far as its folder tells: it goes on, it ended, or it was cut off.

Whether the process that wrote the last sign of life is still there is asked of the system where
that process ran on this machine; of another machine only the age of the sign tells.
"""

from __future__ import annotations

import os
import platform
import time as clocks
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Literal

from driftwell.errors import RecordError
from driftwell.record.heartbeat import EVERY, PROGRESS_FILE, Sign, process_mark, read_sign
from driftwell.record.index import SEGMENTS
from driftwell.record.master import ANSWERS_FILE, MASTER
from driftwell.record.reader import open_run

State = Literal["begun", "going on", "silent", "ended", "cut off", "unknown"]

_PATIENCE = 60.0
"""s without a sign of life, from which on a run of another machine is given up, at the least."""
_GAPS = 10.0
"""The same in the longest times between two signs of that run."""


@dataclass(frozen=True, slots=True)
class Condition:
    """What has become of one run.

    state : "begun" before the first sign of life, "silent" where the process is there and has
        given no sign for long, "unknown" where the files cannot be read
    word : how it ended, or the state, in a word or two
    note : what else the user should know or do; empty where nothing
    sign : the last sign of life; None where there is none
    age : s since that sign by the time of day; never negative
    """

    state: State
    word: str
    note: str
    sign: Sign | None
    age: float

    @property
    def over(self) -> bool:
        """Whether nothing more will come of the run as it is."""
        return self.state in {"ended", "cut off"}


def holds_run(folder: Path) -> bool:
    """Whether a folder holds a run, or what is left of one."""
    return (
        (folder / MASTER).is_file()
        or (folder / SEGMENTS).is_dir()
        or (folder / PROGRESS_FILE).is_file()
    )


def condition_of(folder: Path, day: Callable[[], float] = clocks.time) -> Condition:
    """What has become of the run in `folder`; `day` is the time of day, Unix, s."""
    try:
        sign = read_sign(folder)
    except RecordError as fault:
        return _by_answers(folder, None, 0.0) or Condition(
            "unknown", "unknown", str(fault), None, 0
        )
    if sign is None:
        return _by_answers(folder, None, 0.0) or Condition("begun", "begun", _BEGUN, None, 0.0)
    age = max(day() - sign.stamp, 0.0)
    if sign.outcome:
        note = "" if sign.outcome == "finished" else sign.sentence
        return Condition("ended", sign.outcome, note, sign, age)
    patience = max(_PATIENCE, _GAPS * sign.gap, EVERY)
    there = _is_there(sign)
    if there is None:
        there = age <= patience
    if not there:
        ended = _by_answers(folder, sign, age)
        return ended or Condition("cut off", "cut off", _cut(sign, age), sign, age)
    if age > patience:
        return Condition("silent", "silent", _silent(sign, age), sign, age)
    return Condition("going on", "going on", "", sign, age)


_BEGUN = (
    "no sign of life yet: it has just begun, was cut off at once, or an older driftwell wrote it"
)


def _cut(sign: Sign, age: float) -> str:
    why = "its process is gone"
    if sign.host != platform.node():
        why = f"no sign of it from {sign.host} for {age / 60.0:.0f} min"
    return f"{why}; what was sealed is kept. Give the same command again: it goes on from there"


def _silent(sign: Sign, age: float) -> str:
    return (
        f"its process {sign.process} is there, but has given no sign for {age / 60.0:.0f} min; it "
        "may be stopped, wait for a disk, or write no more"
    )


def _by_answers(folder: Path, sign: Sign | None, age: float) -> Condition | None:
    """The ending that the record itself tells, where the sign of life does not; None if neither."""
    if not (folder / ANSWERS_FILE).is_file():
        return None
    try:
        outcome = open_run(folder).outcome
    except RecordError as fault:
        return Condition("unknown", "unknown", str(fault), sign, age)
    if outcome.exit_code is None:
        return None
    note = "" if outcome.word == "finished" else outcome.sentence
    return Condition("ended", outcome.word, note, sign, age)


def _is_there(sign: Sign) -> bool | None:
    """Whether the process that gave the sign is there; None where this machine cannot know."""
    boot = process_mark(os.getpid()).partition(" ")[0]
    if sign.host != platform.node() or boot != sign.mark.partition(" ")[0]:
        return None
    if sign.mark:
        return process_mark(sign.process) == sign.mark
    try:
        os.kill(sign.process, 0)
    except ProcessLookupError:
        return False
    except (PermissionError, OverflowError):
        pass
    return True
