"""``driftwell converge FILE``: refine everything numerical, and say how sure each answer is."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from contextlib import ExitStack, closing
from dataclasses import dataclass
from functools import partial
from pathlib import Path

from driftwell.cli.studies.drawing import drawn
from driftwell.cli.studies.engines import Engines
from driftwell.cli.studies.place import Place
from driftwell.cli.studies.progress import SweepDisplay
from driftwell.cli.terminal.printing import answer, sign, tell, width
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.errors import DriftwellError, StudyError
from driftwell.exit_codes import FINISHED, NOT_CONVERGED, SOME_FAILED, STOPPED, UNUSABLE
from driftwell.record.summary import WIDTH
from driftwell.scenario.read import read_scenario
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.driver import Outcome, converge
from driftwell.study.convergence.plan import Cost, Plan, Wanted, judged_alone
from driftwell.study.convergence.table import CONVERGENCE_CSV, Report
from driftwell.study.convergence.words import answer_lines, converged, plan_lines
from driftwell.study.engine import Engine
from driftwell.study.kept_engine import KeptEngine
from driftwell.study.progress import SweepResult
from driftwell.study.read import Study, is_study
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE, keep_summary


@dataclass(frozen=True, slots=True)
class Options:
    """What the command line says besides what is wanted; None where it says nothing.

    within : tolerance; questions : names of those it holds for, none for all
    stop_after : s by the clock
    """

    within: float | None = None
    questions: tuple[str, ...] = ()
    workers: int | None = None
    threads: int | None = None
    stop_after: float | None = None
    retry_failed: bool = False
    pictures: bool = True


def converge_command(wanted: Wanted, output: str | None, options: Options, place: Place) -> int:
    """Compute what is not there yet, judge and report; returns the exit code."""
    folder = Path(output) if output is not None else Path(f"{wanted.path.stem}-converge")
    try:
        outcome, written = _carried_out(wanted, folder, options, place)
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    if outcome.result.stopped:
        tell("Stopped; the same command goes on.")
        return STOPPED
    if outcome.result.failures or outcome.report is None:
        return SOME_FAILED
    if options.within is not None and not converged(outcome.report, options.questions):
        return NOT_CONVERGED
    return FINISHED if written else UNUSABLE


def _carried_out(
    wanted: Wanted, folder: Path, options: Options, place: Place
) -> tuple[Outcome, bool]:
    """What it came to, and whether all that was to be written and drawn could be."""
    if is_study(wanted.path):
        raise StudyError(
            f"{wanted.path}: is a study; converge judges one run. Give the scenario it names, with "
            "--set for what varies."
        )
    alone = judged_alone(wanted)
    _refuse_unknown(alone, options.questions)
    tell(alone.title)
    engines = Engines(place.cluster(), options.workers)
    wish = StopWish(lambda: True, engines.kill)
    display = SweepDisplay(wish, options.stop_after)
    with ExitStack() as holding:
        changed = holding.enter_context(
            engines.working_in(folder, alone.text, alone.scenario_text, wish)
        )
        engine_of = engines.engine
        if engines.cluster is not None:
            # a closed engine ends the connection, and the judged run is a sweep of its own
            engine_of = holding.enter_context(closing(KeptEngine(engine_of))).engine
        if changed:
            tell(
                f"{folder}: the scenario, its settings or what is asked were changed since the "
                "last time; runs that are the same are kept, the tables are written anew."
            )
        with Catalogue(folder / CATALOGUE_FILE) as catalogue:
            outcome = converge(
                wanted,
                folder,
                catalogue,
                partial(_swept, folder, catalogue, display, options, engine_of, engines),
                tolerance=options.within,
                sharing_of=lambda load: engines.sharing(load, options.workers, options.threads),
                told=_tell_plan,
            )
        written = _report(folder, outcome)
        if options.pictures and outcome.report is not None:
            written = _draw(folder, outcome.report) and written
    return outcome, written


def _swept(
    folder: Path,
    catalogue: Catalogue,
    display: SweepDisplay,
    options: Options,
    engine_of: Callable[[int, int], Engine],
    engines: Engines,
    study: Study,
) -> SweepResult:
    """The runs of a study, computed where they are not there yet."""
    try:
        return Sweep(
            study,
            folder,
            catalogue,
            display,
            retry_failed=options.retry_failed,
            workers=options.workers,
            threads=options.threads,
            engine_of=engine_of,
            sharing_of=engines.sharing,
        ).result()
    finally:
        display.ends()


def _refuse_unknown(study: Study, questions: Sequence[str]) -> None:
    """Refuse names that no question has."""
    scenario = read_scenario(study.scenario_path, study.settings).scenario
    names = [question.name for question in scenario.question]
    for name in questions:
        if name not in names:
            raise StudyError(
                f'--question "{name}": the scenario asks no such question; it asks '
                + ", ".join(f'"{each}"' for each in names)
            )


def _tell_plan(plan: Plan, cost: Cost) -> None:
    for line in plan_lines(plan, cost, width()):
        tell(line)


def _report(folder: Path, outcome: Outcome) -> bool:
    """Print what was found and keep it in the folder; whether it could be printed."""
    failures = [f"run {each.number} failed: {each.reason}" for each in outcome.result.failures]
    report = outcome.report
    if report is None:
        for line in failures:
            tell(line)
        return True
    table = ["", f"table: {folder / CONVERGENCE_CSV}"]
    lines = [report.plan.study.title, *failures, *answer_lines(report, WIDTH), *table]
    keep_summary(folder, lines)
    return answer(["", *failures, *answer_lines(report, width(), sign()), *table])


def _draw(folder: Path, report: Report) -> bool:
    """Draw the picture and say where it is; whether that could be done."""
    from driftwell.report.study_pictures.convergence import draw_convergence

    return drawn(partial(draw_convergence, folder, report), lambda made: f"picture: {made[0]}")
