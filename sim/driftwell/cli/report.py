"""``driftwell report RUN``: a run or a study as one HTML page."""

from __future__ import annotations

import logging

from driftwell.cli.terminal.printing import answer, tell
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.report.written import write_report


def report_command(folder: str, output: str | None) -> int:
    """Write the page and say where it is; 0, or 2 with a message."""
    logging.getLogger("matplotlib").setLevel(logging.ERROR)  # its caches are not the user's concern
    try:
        made = write_report(folder, output)
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    return FINISHED if answer([f"report: {made.path} ({made.bytes / 1e6:.1f} MB)"]) else UNUSABLE
