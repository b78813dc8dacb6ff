"""``driftwell check FILE``: the faults of a scenario, or in words what will be simulated."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from driftwell.cli.printing import answer, tell
from driftwell.errors import DriftwellError
from driftwell.scenario.explain import explain
from driftwell.scenario.read import read_scenario


def check(path: str | Path, overrides: Sequence[str] = ()) -> int:
    """Print the scenario in words and return 0, or its faults (to stderr) and return 2."""
    try:
        lines = explain(read_scenario(path, overrides))
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    return 0 if answer(lines) else 2
