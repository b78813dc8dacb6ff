"""How a run ended."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Outcome:
    """How a run ended: a word, a sentence, the command's exit code.

    wall_time : s, time the run took by the clock
    steps : steps taken

    The three numbers are None only for a run that has not ended.
    """

    word: str
    sentence: str
    exit_code: int | None
    wall_time: float | None
    steps: int | None


UNFINISHED = Outcome(
    "unfinished",
    "The run is still going on or was cut off; what it sealed so far is here.",
    None,
    None,
    None,
)
"""What is said of a run that has left no answers yet."""
