"""``driftwell watch FOLDER``: how far a run or a sweep is, live on a terminal or once as text."""

from __future__ import annotations

import os
import sys
import time
from pathlib import Path

from driftwell.cli.runs.watch_table import Row, cells, table
from driftwell.cli.terminal.printing import answer, is_terminal, shown, tell, width
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.record.condition import Condition, condition_of, holds_run
from driftwell.record.heartbeat import PROGRESS_FILE

RUNS = "runs"
"""Folder of the runs within a sweep's folder."""
_REDRAWN = 1.0
"""s between two drawings."""
_QUIET = 20.0
"""s in which no run goes on, after which no more is expected: between two runs of a sweep, and
before a run's first sign of life, there is less."""
_USUAL = os.terminal_size((80, 24))


def watch(path: str, once: bool) -> int:
    """Show what the folder holds until nothing goes on there any more; 0, or 2 with a message."""
    folder = Path(path)
    try:
        watched = _Watched(folder)
        if not watched.rows() and not watched.sweep:
            tell(
                f"{path}: no run and no sweep found; a folder that `driftwell run` or `driftwell "
                "sweep` wrote is needed."
            )
            return UNUSABLE
        live = not once and is_terminal(sys.stdout) and os.environ.get("TERM") != "dumb"
        if not live:
            return FINISHED if answer(table(watched.rows(), watched.title, width())) else UNUSABLE
        return _live(watched)
    except (OSError, ValueError) as fault:  # ValueError: a null character in the name
        tell(f"{path}: cannot be read ({getattr(fault, 'strerror', None) or fault}).")
        return UNUSABLE


class _Watched:
    """A folder that is looked at again and again; runs that have ended are read once."""

    def __init__(self, folder: Path) -> None:
        self._folder = folder
        self.sweep = (folder / RUNS).is_dir() and not holds_run(folder)
        self._known: dict[Path, tuple[int, Condition]] = {}

    @property
    def title(self) -> str:
        """What is looked at; empty for a single run, whose row says it."""
        return f"sweep {self._folder}" if self.sweep else ""

    def rows(self) -> list[Row]:
        """What has become of each run there."""
        folder = self._folder
        if self.sweep:
            found = sorted(each for each in (folder / RUNS).iterdir() if each.is_dir())
            return [Row(each.name, self._condition(each)) for each in found]
        if not holds_run(folder):
            return []
        return [Row(folder.name or str(folder.absolute().name), self._condition(folder))]

    def _condition(self, folder: Path) -> Condition:
        try:
            written = (folder / PROGRESS_FILE).stat().st_mtime_ns
        except OSError:
            return condition_of(folder)
        known = self._known.get(folder)
        if known is not None and known[0] == written and known[1].state == "ended":
            return known[1]
        found = condition_of(folder)
        self._known[folder] = written, found
        return found


def _live(watched: _Watched) -> int:
    """Draw again and again, each time over what was drawn before."""
    before: list[str] = []
    quiet_since = time.monotonic()
    try:
        while True:
            began = time.monotonic()
            rows = watched.rows()
            now = time.monotonic()
            wait = max(_REDRAWN, now - began)  # many runs take a while to look at
            if not rows or any(row.condition.state in {"going on", "silent"} for row in rows):
                quiet_since = now
            over = now - quiet_since >= _QUIET or (
                not watched.sweep and all(row.condition.over for row in rows)
            )
            size = _size()
            lines = table(rows, watched.title, size.columns - 1, size.lines - 1)
            sys.stdout.write(_over(before, lines, size.columns))
            sys.stdout.flush()
            before = lines
            if over:
                return FINISHED
            time.sleep(wait)
    except KeyboardInterrupt:
        sys.stdout.write("\n")
        sys.stdout.flush()
        return FINISHED


def _over(before: list[str], lines: list[str], columns: int) -> str:
    """What a terminal is to be sent, so that lines stand where those before stood.

    All in one piece, and each line is cleared behind its end only, so that nothing flickers. A
    terminal made narrower has broken the lines before into several.
    """
    up = sum(max(1, -(-cells(line) // columns)) for line in before)
    start = f"\x1b[{up}A\r" if up else ""
    return start + "".join(f"{shown(line)}\x1b[K\n" for line in lines) + "\x1b[J"


def _size() -> os.terminal_size:
    """Columns and lines of the terminal now; usual ones where it does not say."""
    try:
        size = os.get_terminal_size(sys.stdout.fileno())
    except (OSError, ValueError):
        return _USUAL
    return os.terminal_size((size.columns or _USUAL.columns, size.lines or _USUAL.lines))
