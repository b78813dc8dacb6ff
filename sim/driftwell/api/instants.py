"""Times of a run by words."""

from __future__ import annotations

from driftwell.errors import AnswerError
from driftwell.forms import Time, read_quantity
from driftwell.record.reader import Run as Record


def instant(text: str, run: Record) -> float:
    """s of "start", "end" or a time such as "1 ms". Raises AnswerError for other words."""
    if text in ("start", "end"):
        return 0.0 if text == "start" else run.end_time
    try:
        return float(read_quantity(Time, text))
    except ValueError as fault:
        raise AnswerError(f'{text!r}: needs "start", "end" or a time such as "1 ms"') from fault
