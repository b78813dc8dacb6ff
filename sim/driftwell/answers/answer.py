"""What a run says to its questions."""

from __future__ import annotations

from dataclasses import dataclass

STANDING = "each standing for"
"""Words of a note on simulated charges that stand for more than one."""


@dataclass(frozen=True, slots=True)
class Answer:
    """A value with its unit, its sampling error, and the error of the forces behind it.

    name, ask : of the question, as in the scenario
    value, error : in `unit`; error is None where none is known
    note : what else to know, empty where nothing
    coulomb_error : largest rms relative error of the Coulomb forces that moved the charges until
        then, as measured; 0 where there are none, or all pairs were summed. It is not in `error`.
    field_error : relative rms error of the solved field of the electrodes that pushed them until
        then, as measured when it was solved; 0 where there is none. It is not in `error` either.
    """

    name: str
    ask: str
    value: float
    unit: str
    error: float | None
    note: str
    coulomb_error: float = 0.0
    field_error: float = 0.0
