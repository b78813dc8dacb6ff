"""The numerical axes of a scenario: which of them matter, and the runs along each."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace

import numpy as np

from driftwell.assembly.births import loaded_particles
from driftwell.coulomb.crossover import LEAST
from driftwell.coulomb.form import MIXED_ACCURACY, Coulomb
from driftwell.coulomb.summation import pairs_in_one_sum
from driftwell.electrodes.form import MOST_ACCURATE, Electrodes
from driftwell.images.electrodes import MOST_PANELS, ElectrodeImages
from driftwell.particles.species import bodies
from driftwell.scenario.read import LoadedScenario, read_scenario
from driftwell.study.convergence.weights import finer
from driftwell.study.points import replica_seeds

AXES = ("step", "coulomb", "field_map", "weight", "seeds")
"""All axes, in the order they are told."""
SCHEME_ORDERS = {"kick-drift-kick": 2, "midpoint-rotation": 2, "composed-4": 4, "composed-6": 6}
STEP_PARTS = (2, 4)
TIGHTER = 10.0
"""By how much the tree's error and that of a drawn field are taken smaller; in space, where each
digit costs far more, it is less."""
TIGHTER_IN_SPACE = 4.0
_TIGHTER_COST = 1.5
_LEAST_ACCURACY = 1e-8
AFFORDABLE = 8.0
"""Times the tree's work, up to which the direct sum is taken to judge it by."""
WEIGHT_SEEDS = 2


@dataclass(frozen=True, slots=True)
class Level:
    """One run.

    axis : which axis it belongs to; empty for the run that is to be judged
    fineness : how many times as fine it is along the axis; for seeds the number of the replica
    replica : which seed it has, from 1, the scenario's own
    settings : that make it, besides those of all runs
    cost : of the time the judged run takes
    """

    axis: str
    fineness: float
    replica: int
    settings: tuple[str, ...]
    cost: float


@dataclass(frozen=True, slots=True)
class Axis:
    """One axis that matters.

    levels : its runs, besides the judged one
    words : what is done along it
    left : of the weight's error in the finer runs; other axes have no use for it
    """

    name: str
    levels: tuple[Level, ...]
    words: str
    left: float = 0.0


@dataclass(frozen=True, slots=True)
class Judged:
    """The run that is judged, as its record tells it.

    step, longest : s, its step as chosen, and the longest one really taken
    method : of its Coulomb sum
    charges : simulated, with those to be born
    """

    loaded: LoadedScenario
    step: float
    longest: float
    method: str
    charges: int


def axes_of(
    judged: Judged, wanted: Sequence[str], replicas: int
) -> tuple[list[Axis], dict[str, str]]:
    """The axes that matter, and for each of the others that are wanted why it does not.

    wanted : names out of :data:`AXES`; replicas : seeds in all
    """
    makers: dict[str, Callable[[Judged], Axis | str]] = {
        "step": _step,
        "coulomb": _coulomb,
        "field_map": _field_map,
        "weight": _weight,
        "seeds": lambda judged: _seeds(judged, replicas),
    }
    found: list[Axis] = []
    without: dict[str, str] = {}
    for name in AXES:
        if name not in wanted:
            continue
        made = makers[name](judged)
        if isinstance(made, str):
            without[name] = made
        else:
            found.append(made)
    seeds = 1 + sum(len(axis.levels) for axis in found if axis.name == "seeds")
    own = judged.loaded.scenario.seed
    return [_repeated(axis, max(0, seeds // 2 - 2), own) for axis in found], without


def _repeated(axis: Axis, times: int, own: int) -> Axis:
    """The axis with its cheapest level repeated with so many further seeds."""
    if axis.name == "seeds" or times == 0:
        return axis
    first, last = axis.levels[0], max(level.replica for level in axis.levels)
    more = tuple(
        replace(first, replica=number, settings=(*first.settings, f"seed={seed}"))
        for number, seed in enumerate(replica_seeds(own, last + times)[last:], last + 1)
    )
    return replace(
        axis, levels=axis.levels + more, words=f"{axis.words}; {times} more seeds of the first"
    )


def _step(judged: Judged) -> Axis:
    lengths = [judged.longest / part for part in STEP_PARTS]
    levels = tuple(
        Level("step", float(part), 1, tuple(_fixed(judged, length)), float(part))
        for part, length in zip(STEP_PARTS, lengths, strict=True)
    )
    return Axis("step", levels, "half and a quarter of the step")


def _coulomb(judged: Judged) -> Axis | str:
    form = judged.loaded.scenario.coulomb
    if judged.method == "off":
        return "the charges do not feel each other"
    if judged.method != "tree":
        if form.precision != "mixed":
            return "all pairs are summed, to rounding"
        settings = ("coulomb.precision=double",)
        return _one(judged, "coulomb", 1.0, settings, 1.5, "pairs summed in double precision")
    work = [
        pairs_in_one_sum(form.model_copy(update={"method": method}), judged.charges)
        for method in ("tree", "direct")
    ]
    ratio = max(work[1] / max(work[0], 1.0), 1.0)
    if ratio <= AFFORDABLE:
        direct = ["coulomb.method=direct", *_double(form)]
        return _one(judged, "coulomb", 1.0, direct, ratio, "all pairs summed directly")
    accuracy = max(form.accuracy / TIGHTER, _LEAST_ACCURACY)
    if accuracy > 0.5 * form.accuracy:
        return f"{form.accuracy:g} is the finest accuracy, and {judged.charges} charges are many"
    texts = [f"coulomb.accuracy={accuracy!r}", "coulomb.method=tree"]
    if accuracy < MIXED_ACCURACY:
        texts += _double(form)
    tighter = form.model_copy(update={"method": "tree", "accuracy": accuracy})
    cost = max(pairs_in_one_sum(tighter, judged.charges) / work[0], _TIGHTER_COST)
    words = f"the tree to {accuracy:g} of the force"
    return _one(judged, "coulomb", form.accuracy / accuracy, texts, cost, words)


def _double(form: Coulomb) -> list[str]:
    return ["coulomb.precision=double"] if form.precision == "mixed" else []


def _field_map(judged: Judged) -> Axis | str:
    scenario = judged.loaded.scenario
    if not scenario.electrode:
        return "no field is solved: there are no electrodes"
    electrodes = scenario.electrodes or Electrodes()
    in_space = electrodes.geometry == "spatial"
    factor = TIGHTER_IN_SPACE if in_space else TIGHTER
    accuracy = max(electrodes.field_accuracy / factor, MOST_ACCURATE)
    texts, words, fineness = [], [], 1.0
    if accuracy < 0.9 * electrodes.field_accuracy:
        fineness = electrodes.field_accuracy / accuracy
        texts.append(f"electrodes.field_accuracy={accuracy!r}")
        words.append(f"the electrodes' field to {accuracy:g}")
    images = scenario.images
    if isinstance(images, ElectrodeImages) and 2 * images.panels <= MOST_PANELS:
        fineness = max(fineness, 2.0)
        texts.append(f"images.panels={2 * images.panels}")
        words.append(f"images on {2 * images.panels} triangles")
    if not texts:
        return f"{electrodes.field_accuracy:g} is the finest accuracy of a solved field"
    return _one(judged, "field_map", fineness, texts, 1.0, " and ".join(words))


def _weight(judged: Judged) -> Axis | str:
    loaded = judged.loaded
    found = finer(loaded.scenario, loaded.folder)
    if not found.settings:
        if found.kept:
            names = ", ".join(f'"{name}"' for name in found.kept)
            return f"{names}: the number of macro-charges is fixed, or cannot be raised"
        return "every charge is a real one"
    power = 1 if judged.method in {"tree", "off"} else 2
    seeds = replica_seeds(loaded.scenario.seed, WEIGHT_SEEDS)
    fixed = _fixed(judged)
    levels = tuple(
        Level(
            "weight",
            found.factor,
            number,
            (*fixed, *found.settings, *_seed(seed, number)),
            found.factor**power,
        )
        for number, seed in enumerate(seeds, 1)
    )
    words = f"{found.factor:.3g} times as many charges at the same total charge, of 2 seeds"
    return Axis("weight", levels, words, found.left)


def _seeds(judged: Judged, replicas: int) -> Axis | str:
    loaded = judged.loaded
    if replicas < 2:
        return "only one seed is asked for"
    seeds = replica_seeds(loaded.scenario.seed, replicas)
    if not is_drawn(loaded):
        return "nothing is drawn at random"
    fixed = _fixed(judged)
    levels = tuple(
        Level("seeds", float(number), number, (*fixed, *_seed(seed, number)), 1.0)
        for number, seed in enumerate(seeds[1:], 2)
    )
    return Axis("seeds", levels, f"{replicas - 1} more seed{'s' * (replicas > 2)}")


def _one(
    judged: Judged, name: str, fineness: float, settings: Sequence[str], cost: float, words: str
) -> Axis:
    """An axis of one run, with the step of the judged one."""
    level = Level(name, fineness, 1, (*_fixed(judged), *settings), cost)
    return Axis(name, (level,), words)


def _fixed(judged: Judged, step: float | None = None) -> list[str]:
    """What the judged run has chosen by itself, so that the finer ones choose no other.

    step : s, another one than it has; None: its own
    """
    scenario = judged.loaded.scenario
    settings = []
    if step is not None or scenario.stepping.step == "auto":
        settings.append(f"stepping.step={judged.step if step is None else step!r} s")
    if scenario.coulomb.method == "auto" and judged.charges >= LEAST:
        settings.append(f"coulomb.method={judged.method}")
    return settings


def _seed(seed: int, number: int) -> list[str]:
    return [] if number == 1 else [f"seed={seed}"]


def is_drawn(loaded: LoadedScenario) -> bool:
    """Whether another seed makes another run."""
    scenario = loaded.scenario
    if scenario.source or scenario.process:
        return True
    seed = replica_seeds(scenario.seed, 2)[1]
    other = read_scenario(loaded.path, (*loaded.settings, f"seed={seed}"))
    if (scenario.field, scenario.electrode) != (other.scenario.field, other.scenario.electrode):
        return True  # noise of waveforms
    known = bodies(scenario.species)
    names = tuple(dict.fromkeys(cloud.species for cloud in scenario.cloud))
    first, second = (loaded_particles(each, known, names)[0] for each in (loaded, other))
    return not (
        np.array_equal(first.position, second.position)
        and np.array_equal(first.velocity, second.velocity)
    )
