"""``driftwell sweep STUDY``: compute a study's runs, show progress, print the morning summary."""

from __future__ import annotations

from collections.abc import Sequence
from functools import partial
from pathlib import Path

from driftwell.cli.studies.drawing import drawn
from driftwell.cli.studies.engines import Engines
from driftwell.cli.studies.place import Place
from driftwell.cli.studies.progress import SweepDisplay
from driftwell.cli.terminal.printing import answer, sign, tell, width
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.errors import DriftwellError, StudyError
from driftwell.exit_codes import FINISHED, SOME_FAILED, STOPPED, UNUSABLE
from driftwell.record.summary import WIDTH
from driftwell.study.catalogue import Catalogue
from driftwell.study.progress import SweepResult
from driftwell.study.read import Study, read_study
from driftwell.study.summary import summary
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE, keep_summary
from driftwell.study.table import TABLE_CSV, Table, table_of, write_tables


def sweep_command(
    file: str,
    output: str | None,
    settings: Sequence[str],
    workers: int | None,
    threads: int | None,
    retry_failed: bool,
    pictures: bool,
    place: Place,
    stop_after: float | None = None,
) -> int:
    """Compute what is not there yet; returns the exit code."""
    folder = Path(output) if output is not None else Path(f"{Path(file).stem}-sweep")
    try:
        study = read_study(file, settings)
        if study.limit is not None:
            raise StudyError(
                f"{file}: has a [limit], which chooses its values on the way: "
                f"`driftwell limit {file}` finds it. A sweep needs [[vary]] instead."
            )
        tell(study.title)
        result, written = _carried_out(
            study, folder, workers, threads, retry_failed, pictures, place, stop_after
        )
    except DriftwellError as error:
        tell(str(error))
        return error.exit_code
    if result.stopped:
        return STOPPED
    if result.failures:
        return SOME_FAILED
    return FINISHED if written else UNUSABLE


def _carried_out(
    study: Study,
    folder: Path,
    workers: int | None,
    threads: int | None,
    retry_failed: bool,
    pictures: bool,
    place: Place,
    stop_after: float | None = None,
) -> tuple[SweepResult, bool]:
    """What the sweep came to, and whether all that was to be written and drawn could be."""
    engines = Engines(place.cluster(), workers)
    wish = StopWish(lambda: True, engines.kill)
    display = SweepDisplay(wish, stop_after)
    with engines.working_in(folder, study.text, study.scenario_text, wish) as changed:
        if changed:
            tell(
                f"{folder}: the study or its scenario was changed since the last sweep; runs of "
                "both that are the same are kept, others of the last one stay in the folder."
            )
        with Catalogue(folder / CATALOGUE_FILE) as catalogue:
            try:
                result = Sweep(
                    study,
                    folder,
                    catalogue,
                    display,
                    retry_failed=retry_failed,
                    workers=workers,
                    threads=threads,
                    engine_of=engines.engine,
                    sharing_of=engines.sharing,
                ).result()
            finally:
                display.ends()
            write_tables(folder, study, catalogue)
            table = table_of(study, catalogue)
        written = _report(study, folder, result)
        if pictures:
            written = _draw(folder, table) and written
    return result, written


def _report(study: Study, folder: Path, result: SweepResult) -> bool:
    """Print the summary and keep it in the folder; whether it could be printed."""
    lines = [*summary(study, result, WIDTH), "", f"answers: {folder / TABLE_CSV}"]
    keep_summary(folder, lines)
    return answer(
        ["", *summary(study, result, width(), sign()), "", f"answers: {folder / TABLE_CSV}"]
    )


def _draw(folder: Path, table: Table) -> bool:
    """Draw a picture of each question and say where they are; whether that could be done."""
    from driftwell.report.study_pictures.varied import draw_sweep

    return drawn(
        partial(draw_sweep, folder, table),
        lambda made: f"pictures: {len(made)} in {made[0].parent}",
    )
