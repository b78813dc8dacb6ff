"""Studies from Python: sweeps, convergence and limits, as the commands of the same names.

Runs are computed side by side by worker processes of this machine; what is in the folder already
is not computed again. Ctrl-C stops in order, and the same call goes on.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from contextlib import contextmanager
from pathlib import Path

from driftwell.api.progress import Interrupt
from driftwell.api.study_results import Converged, Limited, Swept
from driftwell.api.study_watcher import StudyWatcher
from driftwell.errors import StudyError
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.axes import AXES
from driftwell.study.convergence.driver import converge as converge_in
from driftwell.study.convergence.plan import Wanted, judged_alone
from driftwell.study.cores import shared, usable_cores
from driftwell.study.limit_run import find_limit, limit_of
from driftwell.study.limit_table import write_limit
from driftwell.study.pool import Pool
from driftwell.study.progress import SweepResult
from driftwell.study.read import Study, is_study, read_study
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE, keep_summary, taken
from driftwell.study.table import table_of, write_tables


def sweep(
    study: str | Path,
    folder: str | Path,
    settings: Sequence[str] = (),
    *,
    workers: int | None = None,
    threads: int | None = None,
    progress: bool = True,
    retry_failed: bool = False,
) -> Swept:
    """Compute all runs of a study file, many side by side.

    Parameters
    ----------
    study : the file
    folder : where runs and tables lie
    settings : ``key=value`` that hold in all runs
    workers, threads : runs side by side and threads of each; None: as it suits
    progress : whether a bar is shown
    retry_failed : start over the runs whose motion could not be continued before

    Raises
    ------
    StudyError
        The study or its scenario has faults.
    RecordError
        The folder holds something else, or cannot be written.
    KeyboardInterrupt
        The user asked to stop; the same call goes on.
    """
    found, folder = read_study(study, settings), Path(folder)
    if found.limit is not None:
        raise StudyError(
            f"{study}: has a [limit]: driftwell.limit finds it. A sweep needs [[vary]]."
        )
    with _working_in(folder, found.text, found.scenario_text, progress) as (catalogue, watcher):
        result = Sweep(
            found,
            folder,
            catalogue,
            watcher,
            retry_failed=retry_failed,
            workers=workers,
            threads=threads,
            engine_of=Pool.of_runs,
        ).result()
        write_tables(folder, found, catalogue)
        swept = Swept(folder, table_of(found, catalogue), result)
        keep_summary(folder, [str(swept)])
    if result.stopped:
        raise KeyboardInterrupt(f"stopped; the same call goes on (the runs: {folder})")
    return swept


def converge(
    scenario: str | Path,
    folder: str | Path,
    settings: Sequence[str] = (),
    *,
    within: float | None = None,
    axes: Sequence[str] = AXES,
    replicas: int = 4,
    workers: int | None = None,
    threads: int | None = None,
    progress: bool = True,
    retry_failed: bool = False,
) -> Converged:
    """Repeat a run with everything numerical refined, and say how sure each answer is.

    Parameters
    ----------
    scenario : the file; one built in code is saved first
    within : relative error that the answers should keep; None: it is only told
    axes : what is refined
    replicas : seeds in all
    folder, settings, workers, threads, progress, retry_failed : as of :func:`sweep`

    Raises
    ------
    DriftwellError
        The scenario has faults or asks nothing, the folder cannot be written, or the judged run
        failed.
    KeyboardInterrupt
        The user asked to stop; the same call goes on.
    """
    wanted = Wanted(Path(scenario), tuple(settings), tuple(axes), replicas)
    if is_study(wanted.path):
        raise StudyError(f"{scenario}: is a study; converge judges one run of a scenario.")
    alone, folder = judged_alone(wanted), Path(folder)
    with _working_in(folder, alone.text, alone.scenario_text, progress) as (catalogue, watcher):

        def swept(study: Study) -> SweepResult:
            return Sweep(
                study,
                folder,
                catalogue,
                watcher,
                retry_failed=retry_failed,
                workers=workers,
                threads=threads,
                engine_of=Pool.of_runs,
            ).result()

        outcome = converge_in(
            wanted,
            folder,
            catalogue,
            swept,
            tolerance=within,
            sharing_of=lambda load: shared(load, usable_cores(), workers, threads),
            told=lambda plan, cost: None,
        )
        if outcome.report is not None:
            found = Converged(folder, outcome.report, outcome.result.failures)
            keep_summary(folder, [str(found)])
    if outcome.result.stopped:
        raise KeyboardInterrupt(f"stopped; the same call goes on (the runs: {folder})")
    if outcome.report is None:
        why = "; ".join(each.reason for each in outcome.result.failures) or "it has no answers"
        raise StudyError(f"{folder}: the judged run failed: {why}")
    return found


def limit(
    study: str | Path,
    folder: str | Path,
    settings: Sequence[str] = (),
    *,
    workers: int | None = None,
    threads: int | None = None,
    progress: bool = True,
    retry_failed: bool = False,
) -> Limited:
    """Find the value of a key at which an answer crosses a threshold.

    study : a file with a ``[limit]``; the rest as of :func:`sweep`

    Raises
    ------
    StudyError
        The study has faults, or searches for nothing.
    KeyboardInterrupt
        The user asked to stop; the same call goes on.
    """
    asked, folder = read_study(study, settings), Path(folder)
    limit_of(asked)
    with _working_in(folder, asked.text, asked.scenario_text, progress) as (catalogue, watcher):
        found = find_limit(
            asked,
            folder,
            catalogue,
            watcher,
            retry_failed=retry_failed,
            workers=workers,
            threads=threads,
            engine_of=Pool.of_runs,
        )
        write_limit(folder, found)
        limited = Limited(folder, found)
        keep_summary(folder, [str(limited)])
    if found.verdict is None:
        raise KeyboardInterrupt(f"stopped; the same call goes on (the runs: {folder})")
    return limited


@contextmanager
def _working_in(
    folder: Path, study: str, scenario: str, shown: bool
) -> Iterator[tuple[Catalogue, StudyWatcher]]:
    """The folder taken, Ctrl-C heard, the catalogue open."""
    wish = Interrupt(shown)
    watcher = StudyWatcher(wish, shown)
    with taken(folder, study, scenario), wish.listening():
        try:
            with Catalogue(folder / CATALOGUE_FILE) as catalogue:
                yield catalogue, watcher
        finally:
            watcher.ends()
