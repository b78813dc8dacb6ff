"""All runs that a convergence study makes, the judged one first; and what they will cost."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from pathlib import Path

from driftwell.assembly import assembled
from driftwell.errors import RecordError, StudyError
from driftwell.forms.wording import toml_text
from driftwell.record.reader import Run, open_run
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.study.axis import PURE
from driftwell.study.cases import study_of
from driftwell.study.convergence.axes import (
    AXES,
    SCHEME_ORDERS,
    Axis,
    Judged,
    Level,
    axes_of,
    is_drawn,
)
from driftwell.study.cores import Load, Sharing
from driftwell.study.forecast import BESIDES
from driftwell.study.missing import ANSWERED, Needed, load_of, needed_by
from driftwell.study.points import Axis as Varied
from driftwell.study.read import Study
from driftwell.study.sweep_folder import run_folder

BASE = Level("", 1.0, 1, (), 1.0)
"""The run that is judged."""
MOST_REPLICAS = 1000


@dataclass(frozen=True, slots=True)
class Plan:
    """The runs; case number k of the study is the level number k - 1.

    without : axes that were wanted and do not matter, and why
    step_lengths : s a step on the average, of the runs along the step; none where it is no axis
    random : whether another seed makes another run
    """

    study: Study
    levels: tuple[Level, ...]
    axes: tuple[Axis, ...]
    without: dict[str, str]
    scheme_order: int
    step_lengths: tuple[float, ...]
    random: bool


@dataclass(frozen=True, slots=True)
class Wanted:
    """What is asked for.

    settings : ``key=value`` that hold in all runs
    axes : names out of :data:`driftwell.study.convergence.axes.AXES`
    replicas : seeds in all, the scenario's own among them
    """

    path: Path
    settings: tuple[str, ...] = ()
    axes: tuple[str, ...] = AXES
    replicas: int = 4


def judged_alone(wanted: Wanted) -> Study:
    """The study of the judged run alone, which all else follows from.

    Raises ScenarioError where the file has faults, StudyError where it asks no questions.
    """
    loaded = read_scenario(wanted.path, wanted.settings)
    if not loaded.scenario.question:
        raise StudyError(
            f"{wanted.path}: asks no questions, so there is nothing whose error could be told; "
            "needs a [[question]] at least."
        )
    return _study(wanted, loaded, [BASE])


def planned(wanted: Wanted, judged: Run) -> Plan:
    """All runs, from the record of the judged one."""
    loaded = read_scenario(wanted.path, wanted.settings)
    schedule = assembled(loaded).schedule
    spans = schedule.time[1:] - schedule.time[:-1]
    scenario = loaded.scenario
    charges = scenario.charges(loaded.folder)
    header = judged.header
    run = Judged(
        loaded, header.step, float((spans / schedule.steps).max()), header.coulomb_method, charges
    )
    axes, without = axes_of(run, wanted.axes, wanted.replicas)
    levels = [BASE, *(level for axis in axes for level in axis.levels)]
    lengths: list[float] = []
    for axis in axes:
        if axis.name == "step":
            own = [level for level in axis.levels if level.replica == 1]
            finer = [assembled(_as_case(loaded, level)).schedule for level in own]
            lengths = [scenario.duration / each.total_steps for each in (schedule, *finer)]
    return Plan(
        _study(wanted, loaded, levels),
        tuple(levels),
        tuple(axes),
        without,
        SCHEME_ORDERS[scenario.stepping.scheme],
        tuple(lengths),
        is_drawn(loaded),
    )


@dataclass(frozen=True, slots=True)
class Cost:
    """What is still to be computed.

    runs : how many; work : s of all of them, each for itself; clock : s side by side
    """

    runs: int
    work: float
    clock: float


def cost(plan: Plan, folder: Path, base: float, sharing_of: Callable[[Load], Sharing]) -> Cost:
    """What the runs that are not in the folder will cost; base : s that the judged run took."""
    missing: dict[str, tuple[Needed, float]] = {}
    for case, level in zip(plan.study.cases, plan.levels, strict=True):
        needed = needed_by(read_scenario(plan.study.scenario_path, case.settings))
        if not _is_there(folder, needed.digest):
            missing.setdefault(needed.digest, (needed, BESIDES + level.cost * base))
    if not missing:
        return Cost(0, 0.0, 0.0)
    each = [seconds for _, seconds in missing.values()]
    sharing = sharing_of(load_of([needed for needed, _ in missing.values()]))
    return Cost(len(each), sum(each), max(sum(each) / sharing.workers, *each))


def _is_there(folder: Path, digest: str) -> bool:
    """Whether the run has come to its end."""
    try:
        return open_run(run_folder(folder, digest)).outcome.word in ANSWERED
    except RecordError:
        return False


def _as_case(loaded: LoadedScenario, level: Level) -> LoadedScenario:
    return read_scenario(loaded.path, (*loaded.settings, *level.settings))


def _study(wanted: Wanted, loaded: LoadedScenario, levels: Sequence[Level]) -> Study:
    """The runs as a study; its text says what was asked for, the same for one run and for all."""
    title = loaded.scenario.title
    text = "\n".join(
        [
            f"title = {toml_text(title)}",
            f"scenario = {toml_text(wanted.path.name)}",
            f"set = {toml_text(list(wanted.settings))}",
            f"axes = {toml_text(list(wanted.axes))}",
            f"replicas = {wanted.replicas}",
            "",
        ]
    )
    values = [(level.axis, level.fineness, float(level.replica)) for level in levels]
    varied = [
        Varied(name, tuple(dict.fromkeys(column)), unit, False, 0, 0, True)
        for name, unit, column in zip(
            ("axis", "fineness", "seed number"),
            ("", PURE, PURE),
            zip(*values, strict=True),
            strict=True,
        )
    ]
    cases = [level.settings for level in levels]
    return study_of(
        wanted.path, wanted.settings, cases, title, axes=varied, values=values, text=text
    )
