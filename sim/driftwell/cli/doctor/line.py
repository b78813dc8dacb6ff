"""What one check found, and what to do about it."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass

OK, NOTE, FAULT = "ok", "note", "fault"
"""As it should be; runs go on, but worth knowing; no run can go on."""


@dataclass(frozen=True, slots=True)
class Line:
    """What one check found.

    word : OK, NOTE or FAULT
    what : what was looked at, some 16 letters at most
    found : a sentence or less
    remedy : what to do; empty where there is nothing to do
    """

    word: str
    what: str
    found: str
    remedy: str = ""


Check = Callable[[], Iterable[Line]]
"""Looks at one group of things; what it raises is told as a note."""
