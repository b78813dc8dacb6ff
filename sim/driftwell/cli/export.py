"""``driftwell export RUN FORMAT``: a run for other programs."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from driftwell.cli.terminal.printing import answer, tell
from driftwell.errors import DriftwellError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.exports.table import export
from driftwell.record.reader import open_run


def export_command(
    path: str,
    format_name: str,
    output: str | None,
    what: Sequence[str],
    times: Sequence[str],
    author: str,
) -> int:
    """Write it and say where, or say why not (to stderr); returns the exit code."""
    try:
        made = export(open_run(path), format_name, output, what, times, author)
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    return FINISHED if answer([f"{format_name}: {made} ({_size(made) / 1e6:.3g} MB)"]) else UNUSABLE


def _size(path: Path) -> int:
    files = path.rglob("*") if path.is_dir() else [path]
    return sum(each.stat().st_size for each in files if each.is_file())
