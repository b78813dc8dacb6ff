"""What a run's report is written from, read once."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.errors import DriftwellError, RecordError
from driftwell.hand.comparison import Comparison, comparisons
from driftwell.hand.formula import HandValue
from driftwell.hand.scene import scene_of_run
from driftwell.hand.table import hand_values
from driftwell.judgement import Finding, judged
from driftwell.record.condition import condition_of
from driftwell.record.reader import Run
from driftwell.report.again import Again, read_again
from driftwell.report.pictures.scene import Scene, scene_of


@dataclass(frozen=True, slots=True)
class Matter:
    """A run as its report sees it.

    scene : what pictures are drawn from
    again : the scenario, as far as it can be read again
    state : what has become of a run that has not ended: "going on", "cut off", ...
    """

    run: Run
    scene: Scene
    again: Again
    findings: tuple[Finding, ...]
    comparisons: tuple[Comparison, ...]
    by_hand: tuple[HandValue, ...]
    state: str


def matter_of(run: Run) -> Matter:
    """Read what the report needs.

    Raises RecordError where the record is damaged.
    """
    damage = run.damage()
    if damage:
        more = f" ({len(damage) - 1} more like this)" if len(damage) > 1 else ""
        raise RecordError(f"{damage[0]}{more} No report was written.")
    return Matter(
        run=run,
        scene=scene_of(run),
        again=read_again(run),
        findings=judged(run),
        comparisons=tuple(comparisons(run)),
        by_hand=tuple(_by_hand(run)),
        state=condition_of(run.folder).state if run.outcome.exit_code is None else "ended",
    )


def _by_hand(run: Run) -> list[HandValue]:
    """All that formulas say of the scenario; nothing where it cannot be told."""
    try:
        scene = scene_of_run(run)
    except DriftwellError:
        return []
    return [] if scene is None else hand_values(scene)
