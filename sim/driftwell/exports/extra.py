"""What to say where a format's library is not installed."""

from __future__ import annotations

from driftwell.errors import RecordError


def missing(library: str, extra: str, what: str) -> RecordError:
    """The error to raise: one sentence that names the command."""
    return RecordError(
        f"{what} needs {library}, which is not installed; install it with: "
        f"pip install 'driftwell[{extra}]'"
    )
