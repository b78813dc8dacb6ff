"""What a run says to its questions."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Answer:
    """A value with its unit and its sampling error.

    name, ask : of the question, as in the scenario
    value, error : in `unit`; error is None where none is known
    note : what else to know, empty where nothing
    """

    name: str
    ask: str
    value: float
    unit: str
    error: float | None
    note: str
