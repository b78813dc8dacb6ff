"""``driftwell info RUN``: what a run's folder holds."""

from __future__ import annotations

from pathlib import Path

from driftwell.cli.hand import compared
from driftwell.cli.printing import answer, sign, tell, width
from driftwell.errors import DriftwellError
from driftwell.record.reader import open_run
from driftwell.record.summary import summary


def info(path: str | Path) -> int:
    """Print the summary and return 0, or what is wrong with the folder (to stderr) and return 2."""
    try:
        run = open_run(path)
        lines = summary(run, width(), sign())
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    by_hand = compared(run)
    return 0 if answer([*lines, *([""] * bool(by_hand)), *by_hand]) else 2
