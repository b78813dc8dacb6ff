"""``driftwell run FILE``: execute a scenario, show progress, print the answers."""

from __future__ import annotations

import logging
from collections.abc import Sequence
from pathlib import Path
from typing import Any

from driftwell import exit_codes
from driftwell.answers.answer_lines import answer_lines, common_lines
from driftwell.cli.runs.hand import compared
from driftwell.cli.runs.judgement import judgement_lines
from driftwell.cli.runs.progress import ProgressDisplay
from driftwell.cli.terminal.printing import answer, same_place, sign, tell, width
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.errors import DriftwellError
from driftwell.forms.paragraph import paragraph
from driftwell.judgement import Finding, judged
from driftwell.kernels.compilation import first_compilation
from driftwell.record.master import MASTER
from driftwell.record.reader import open_run
from driftwell.run import FINISHED, FULL, Result, run
from driftwell.scenario.read import LoadedScenario, read_scenario


def run_command(
    file: str,
    output: str | None,
    settings: Sequence[str],
    threads: int,
    *,
    pictures: bool = True,
    fresh: bool = False,
    stop_after: float | None = None,
    force: bool = False,
) -> int:
    """Execute a scenario; returns the exit code of its outcome, or 2 with a message."""
    folder = Path(output) if output is not None else Path(f"{Path(file).stem}-run")
    try:
        loaded = read_scenario(file, settings)
        tell(loaded.scenario.title)
        result, written = _carried_out(
            loaded, folder, threads, pictures, fresh=fresh, stop_after=stop_after, force=force
        )
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    except MemoryError as error:
        tell(too_little_memory(error))
        return exit_codes.UNUSABLE
    kept = exit_codes.FINISHED if written else exit_codes.UNUSABLE
    return result.outcome.exit_code or kept


def _carried_out(
    loaded: LoadedScenario,
    folder: Path,
    threads: int,
    pictures: bool,
    **options: Any,
) -> tuple[Result, bool]:
    """The run's result, and whether all that was to be printed and drawn could be."""
    wish = StopWish((folder / MASTER).exists)
    display = ProgressDisplay(wish, threads, loaded.scenario.coulomb)
    with wish.listening():
        try:
            with first_compilation(display.compiles):
                result = run(loaded, folder, display, threads, **options)
        finally:
            display.ends()
        written = _report(result)
        if pictures and result.outcome.word != FULL:
            written = _draw(folder) and written
    return result, written


def _report(result: Result) -> bool:
    """Print how a run ended and what it answers; whether that could be written."""
    ending = f"{result.outcome.word}: {result.outcome.sentence}"
    if result.outcome.word != FINISHED and not same_place():
        tell(ending)  # whoever looks at stderr alone must know too
    row, outcome = result.ledger, result.outcome
    findings = _findings(result)
    lines = [
        "",
        ending,
        f"{row.count:.7g} real particle{'s' * (row.count != 1)} left, {row.count_lost:.7g} lost; "
        f"{outcome.steps} step{'s' * (outcome.steps != 1)} in {outcome.wall_time:.1f} s",
        f"ledger residuals: energy {row.energy_residual:.1e}, momentum "
        f"{row.momentum_residual:.1e}, angular momentum {row.angular_residual:.1e}, third law "
        f"{row.third_law_residual:.1e}",
        "",
        *_doubted(findings),
        *_answers(result),
        *common_lines(result.answers, width()),
        *_by_hand(result),
        *_judgement(result, findings),
        "",
        f"record: {result.folder / MASTER}",
    ]
    return answer(lines)


def _answers(result: Result) -> list[str]:
    if result.outcome.word == FULL:
        return ["The questions are answered once the run is whole."]
    found = answer_lines(result.answers, width(), sign())
    return found or ["The scenario asks no questions: the run only recorded."]


def _by_hand(result: Result) -> list[str]:
    """The answers beside hand calculations."""
    lines = [] if result.outcome.word == FULL else compared(open_run(result.folder))
    return ["", *lines] if lines else []


def _findings(result: Result) -> tuple[Finding, ...]:
    """What is to be said of a run that has been recorded; a record that cannot be read is told."""
    if result.outcome.word == FULL:
        return ()
    try:
        return judged(open_run(result.folder))
    except DriftwellError as error:
        tell(str(error))
        return ()


def _doubted(findings: Sequence[Finding]) -> list[str]:
    """What the ledger and the Coulomb sum say against the answers, before them."""
    return [
        line
        for each in findings
        if each.grave
        for line in (*paragraph(f"Doubt: {each.sentence}", width(), rest="  "), "")
    ]


def _judgement(result: Result, findings: Sequence[Finding]) -> list[str]:
    """What else is to be said that was not told before, behind the answers."""
    if result.outcome.word == FULL:
        return []
    return ["", *judgement_lines([each for each in findings if not each.told], width())]


def _draw(folder: Path) -> bool:
    """Draw the pictures and say where they are; whether they could be drawn and told of."""
    from driftwell.report.pictures.run_pictures import draw

    logging.getLogger("matplotlib").setLevel(logging.ERROR)  # its caches are not the user's concern
    try:
        made = draw(open_run(folder))
    except DriftwellError as error:
        tell(str(error))
        return False
    return not made or answer([f"pictures: {len(made)} in {made[0].parent}"])


def too_little_memory(error: MemoryError) -> str:
    """What to say where the system gives no more memory."""
    why = f" ({error})" if str(error) else ""
    return (
        f"This machine has too little memory for the run{why}. Take fewer charges of more weight "
        "each, record less often, or track fewer charges; what was sealed before is kept."
    )
