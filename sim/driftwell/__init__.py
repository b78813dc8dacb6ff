"""driftwell: how many charges is too many, and how sure is that answer?

The command line is one door, Python the other: :class:`Scenario` builds what a file would say,
:func:`read` reads such a file, :func:`open_run` what a run left behind.
"""

from __future__ import annotations

from importlib import import_module
from typing import TYPE_CHECKING, Any

from driftwell._version import __version__

if TYPE_CHECKING:
    from driftwell.api.raw_values import with_unit
    from driftwell.api.run import Run, open_run
    from driftwell.api.scenario import Scenario, read
    from driftwell.api.studies import converge, limit, sweep
    from driftwell.errors import (
        AnswerError,
        DriftwellError,
        RecordError,
        ScenarioError,
        StepError,
        StudyError,
    )

_PLACES = {
    "Scenario": "api.scenario",
    "read": "api.scenario",
    "with_unit": "api.raw_values",
    "Run": "api.run",
    "open_run": "api.run",
    "sweep": "api.studies",
    "converge": "api.studies",
    "limit": "api.studies",
    "DriftwellError": "errors",
    "ScenarioError": "errors",
    "StudyError": "errors",
    "StepError": "errors",
    "RecordError": "errors",
    "AnswerError": "errors",
}
"""What users import from here, and the module it lies in."""

__all__ = [
    "AnswerError",
    "DriftwellError",
    "RecordError",
    "Run",
    "Scenario",
    "ScenarioError",
    "StepError",
    "StudyError",
    "__version__",
    "converge",
    "limit",
    "open_run",
    "read",
    "sweep",
    "with_unit",
]


def __getattr__(name: str) -> Any:
    """Load a part only when it is asked for, so that ``driftwell --help`` stays quick."""
    if name not in _PLACES:
        raise AttributeError(f"module 'driftwell' has no attribute {name!r}")
    found = getattr(import_module(f"driftwell.{_PLACES[name]}"), name)
    globals()[name] = found
    return found


def __dir__() -> list[str]:
    return sorted(__all__)
