"""``driftwell run FILE``: execute a scenario, show progress, print the answers."""

from __future__ import annotations

import math
import sys
from collections.abc import Sequence
from pathlib import Path

from driftwell.answers.answer import Answer
from driftwell.cli.progress import ProgressDisplay
from driftwell.errors import DriftwellError
from driftwell.record.reader import open_run
from driftwell.run import Result, run
from driftwell.scenario.read import read_scenario


def run_command(
    file: str, output: str | None, settings: Sequence[str], threads: int, pictures: bool
) -> int:
    """Execute a scenario; returns the exit code of its outcome, or 2 with a message."""
    folder = Path(output) if output else Path(f"{Path(file).stem}-run")
    display = ProgressDisplay()
    try:
        loaded = read_scenario(file, settings)
        print(loaded.scenario.title, file=sys.stderr)
        with display.listening():
            result = run(loaded, folder, display, threads)
            display.ends()
    except DriftwellError as error:
        display.ends()
        print(error, file=sys.stderr)
        return error.exit_code
    print("\n".join(_told(result)), flush=True)
    if pictures:
        _draw(folder)
    return result.outcome.exit_code or 0


def _draw(folder: Path) -> None:
    """Draw the run; what hinders that is said, and takes nothing from the answers."""
    from driftwell.report.pictures import draw

    try:
        files = draw(open_run(folder))
    except DriftwellError as error:
        print(error, file=sys.stderr)
        return
    if files:
        print(f"pictures: {files[0].parent}, {len(files)} files")


def _told(result: Result) -> list[str]:
    """The end of a run: outcome, ledger, answers as a table, and where it all is."""
    row, outcome = result.ledger, result.outcome
    return [
        "",
        f"{outcome.word}: {outcome.sentence}",
        f"{outcome.steps} steps in {outcome.wall_time:.1f} s; {row.count - 0:g} real particles "
        f"left, {row.count_lost:g} lost",
        f"ledger: energy residual {row.energy_residual:.1e}, momentum {row.momentum_residual:.1e}, "
        f"angular momentum {row.angular_residual:.1e}, third law {row.third_law_residual:.1e}",
        "",
        *_table(result.answers),
        "",
        f"record: {result.folder}/run.h5",
    ]


def _table(answers: Sequence[Answer]) -> list[str]:
    """The answers, aligned."""
    if not answers:
        return ["The scenario asks no questions."]
    cells = [(answer.name, _value(answer), answer.unit, answer.note) for answer in answers]
    name = max(len(cell[0]) for cell in cells)
    value = max(len(cell[1]) for cell in cells)
    unit = max(len(cell[2]) for cell in cells)
    return [
        f"{cell[0]:<{name}}  {cell[1]:>{value}} {cell[2]:<{unit}}  {cell[3]}".rstrip()
        for cell in cells
    ]


def _value(answer: Answer) -> str:
    """Value and error to the digits the error warrants."""
    if math.isnan(answer.value):
        return "none"
    if answer.error is None or not math.isfinite(answer.error) or answer.error <= 0.0:
        return f"{answer.value:.6g}"
    if answer.value != 0.0:
        digits = math.floor(math.log10(abs(answer.value))) - math.floor(math.log10(answer.error))
        shown = f"{answer.value:.{max(2, min(digits + 2, 12))}g}"
    else:
        shown = "0"
    return f"{shown} +- {answer.error:.2g}"
