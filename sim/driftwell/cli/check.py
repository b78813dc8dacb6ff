"""``driftwell check FILE``: the faults of a scenario or study, or in words what it would run."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from driftwell.cli.terminal.printing import answer, tell, width
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario
from driftwell.study.explain import explain_study
from driftwell.study.read import is_study, read_study


def check(path: str | Path, overrides: Sequence[str] = ()) -> int:
    """Print the file in words and return 0, or its faults (to stderr) and return 2."""
    try:
        if is_study(path):
            lines = explain_study(read_study(path, overrides), width())
        else:
            lines = explain(read_scenario(path, overrides))
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    return FINISHED if answer(lines) else UNUSABLE
