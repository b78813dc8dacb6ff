"""What can go wrong, in words: where, what was found, what is needed, what to do.

Every error a user can cause is a :class:`DriftwellError`; the command line prints its text and
leaves with its exit code. Anything else that reaches the user is a defect of driftwell.
"""

from __future__ import annotations

from driftwell.exit_codes import NOT_CONTINUED, UNUSABLE


class DriftwellError(Exception):
    """Base of all errors that are told to the user without a traceback."""

    exit_code = UNUSABLE


class ScenarioError(DriftwellError):
    """A scenario file cannot be used; the text lists every fault found in it."""


class StudyError(DriftwellError):
    """A study file cannot be used; the text lists every fault found in it."""


class StepError(DriftwellError):
    """The motion cannot be continued: not a number, runaway, or unresolved collapse.

    charge : id of the charge it happened to, where it was one
    """

    exit_code = NOT_CONTINUED

    def __init__(self, text: str, charge: int | None = None) -> None:
        super().__init__(text)
        self.charge = charge


class RecordError(DriftwellError):
    """A run folder cannot be written or read."""


class BusyError(RecordError):
    """A folder is in use by another process."""


class FullError(RecordError):
    """The disk refuses what a run goes on recording; what was sealed before is kept."""


class AnswerError(DriftwellError):
    """A question cannot be answered from what the run recorded."""
