"""``driftwell info RUN``: what a run's folder holds."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from driftwell.cli.runs.hand import compared
from driftwell.cli.runs.judgement import judgement_lines
from driftwell.cli.terminal.printing import answer, sign, tell, width
from driftwell.errors import DriftwellError, RecordError
from driftwell.exit_codes import FINISHED, UNUSABLE
from driftwell.judgement import judged
from driftwell.record.reader import Run, open_run
from driftwell.record.summary import summary


def info(path: str | Path) -> int:
    """Print the summary and return 0, or what is wrong with the folder (to stderr) and return 2."""
    try:
        run = open_run(path)
        lines = summary(run, width(), sign())
        lines += ["", *_judgement(run)]
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    by_hand = compared(run)
    return FINISHED if answer([*lines, *([""] * bool(by_hand)), *by_hand]) else UNUSABLE


def _judgement(run: Run) -> list[str]:
    """What is to be said of it; a record that cannot be read has been told of above."""
    try:
        found = [replace(each, grave=False) for each in judged(run)]
    except RecordError:
        return ["judgement: not possible, for the record cannot be read"]
    return judgement_lines(found, width())
