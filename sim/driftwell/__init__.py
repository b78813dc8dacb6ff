"""driftwell: how many charges is too many, and how sure is that answer?

The command line is the main door; from Python, :func:`open_run` reads what a run left behind.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from driftwell._version import __version__

if TYPE_CHECKING:
    from driftwell.record.reader import open_run

__all__ = ["__version__", "open_run"]


def __getattr__(name: str) -> Any:
    """Load the reader only when it is asked for, so that ``driftwell --help`` stays quick."""
    if name == "open_run":
        from driftwell.record.reader import open_run

        return open_run
    raise AttributeError(f"module 'driftwell' has no attribute {name!r}")
