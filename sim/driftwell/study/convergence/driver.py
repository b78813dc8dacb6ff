"""The driver: the judged run first, which says what the others are, then all of them.

Every run goes by its digest through the catalogue of the folder, as those of a sweep do: the judged
run is common to all axes, what is finished is never computed again, what was cut off goes on.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from driftwell.record.reader import open_run
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.judgement import judged
from driftwell.study.convergence.plan import Cost, Plan, Wanted, cost, judged_alone, planned
from driftwell.study.convergence.table import Report, write_convergence
from driftwell.study.cores import Load, Sharing
from driftwell.study.progress import SweepResult
from driftwell.study.read import Study
from driftwell.study.sweep_folder import run_folder


@dataclass(frozen=True, slots=True)
class Outcome:
    """What it came to; report : None where the judged run has no answers, or a stop was asked."""

    result: SweepResult
    report: Report | None


def converge(
    wanted: Wanted,
    folder: Path,
    catalogue: Catalogue,
    swept: Callable[[Study], SweepResult],
    *,
    tolerance: float | None = None,
    sharing_of: Callable[[Load], Sharing],
    told: Callable[[Plan, Cost], None],
) -> Outcome:
    """Compute what is not there yet, judge all answers, and write the tables into the folder.

    swept : carries out the runs of a study
    told : hears the plan and its cost, once the judged run has been timed

    Raises
    ------
    DriftwellError
        The scenario has faults or asks nothing, or the folder cannot be written.
    """
    alone = judged_alone(wanted)
    result = swept(alone)
    digest = result.digests.get(1, "")
    if result.stopped or digest not in result.answers:
        return Outcome(result, None)
    run = open_run(run_folder(folder, digest))
    plan = planned(wanted, run)
    told(plan, cost(plan, folder, run.outcome.wall_time or 0.0, sharing_of))
    result = swept(plan.study)
    if result.stopped:
        return Outcome(result, None)
    rows = judged(plan, result.digests, result.answers)
    report = Report(plan, tuple(rows), tolerance)
    write_convergence(folder, report, catalogue)
    return Outcome(result, report)
