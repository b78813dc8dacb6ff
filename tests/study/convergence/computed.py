"""Convergence studies whose runs are really computed, in this process."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import asdict
from pathlib import Path
from typing import Any

from driftwell.run import run
from driftwell.scenario.read import read_scenario
from driftwell.study.catalogue import Catalogue
from driftwell.study.convergence.driver import Outcome, converge
from driftwell.study.convergence.plan import Cost, Plan, Wanted
from driftwell.study.cores import Load, Sharing
from driftwell.study.engine import Task
from driftwell.study.progress import SweepProgress, SweepResult
from driftwell.study.read import Study
from driftwell.study.sweep import Sweep
from driftwell.study.sweep_folder import CATALOGUE_FILE
from tests.running import Unwatched
from tests.study.small_sweeps import Heard, Scripted


def carried_out(task: Task) -> dict[str, Any]:
    """What a worker replies, from the run itself."""
    content = task.content
    loaded = read_scenario(content["scenario"], content["settings"])
    result = run(loaded, Path(content["folder"]), Unwatched())
    return {
        "word": result.outcome.word,
        "sentence": result.outcome.sentence,
        "wall_time": result.outcome.wall_time,
        "seconds": 0.0,
        "answers": [asdict(answer) for answer in result.answers],
    }


class Computed:
    """Convergence studies in one folder.

    asked : contents of all tasks that were carried out, in their order
    told : plans and costs
    """

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.asked: list[dict[str, Any]] = []
        self.told: list[tuple[Plan, Cost]] = []

    def __call__(
        self,
        wanted: Wanted,
        tolerance: float | None = None,
        goes: Callable[[SweepProgress], bool] = lambda _: True,
    ) -> Outcome:
        """Carry one out, or go on with it."""
        self.folder.mkdir(exist_ok=True)
        with Catalogue(self.folder / CATALOGUE_FILE) as catalogue:

            def swept(study: Study) -> SweepResult:
                engine = Scripted(carried_out, 1)
                observer = Heard(goes)
                sweep = Sweep(
                    study,
                    self.folder,
                    catalogue,
                    observer,
                    engine_of=engine.of,
                    sharing_of=lambda load, workers, threads: one_by_one(load),
                )
                result = sweep.result()
                self.asked += engine.asked
                return result

            return converge(
                wanted,
                self.folder,
                catalogue,
                swept,
                tolerance=tolerance,
                sharing_of=one_by_one,
                told=lambda plan, cost: self.told.append((plan, cost)),
            )


def one_by_one(load: Load) -> Sharing:
    return Sharing(1, 1, "one after another")
