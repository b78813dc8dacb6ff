"""``driftwell info RUN``: what a run's folder holds."""

from __future__ import annotations

import sys
from pathlib import Path

from driftwell.errors import DriftwellError
from driftwell.record.reader import open_run
from driftwell.record.summary import summary


def info(path: str | Path) -> int:
    """Print the summary and return 0, or what is wrong with the folder (to stderr) and return 2."""
    try:
        lines = summary(open_run(path))
    except DriftwellError as error:
        print(error, file=sys.stderr)
        return error.exit_code
    print("\n".join(lines))
    return 0
