"""From the answers of all runs to the errors of the judged one's."""

from __future__ import annotations

import math
from collections import Counter
from collections.abc import Mapping, Sequence

from driftwell.answers.answer import Answer
from driftwell.study.convergence.axes import Axis, Level
from driftwell.study.convergence.chance import Chance, chance_of
from driftwell.study.convergence.differences import (
    AxisError,
    error_of_chance,
    error_of_one,
    error_of_step,
    error_of_weight,
    nothing_told,
)
from driftwell.study.convergence.plan import BASE, Plan
from driftwell.study.convergence.verdict import Convergence

Key = tuple[str, str, str, int]
Answers = Mapping[Level, Mapping[Key, Answer]]


def judged(
    plan: Plan, digests: Mapping[int, str], answers: Mapping[str, Sequence[Answer]]
) -> list[Convergence]:
    """All answers of the judged run, each with its errors.

    digests : of the runs by the numbers of their cases; answers : of the runs that have any, by
    their digests
    """
    found = {
        level: _by_key(answers.get(digests.get(number, ""), ()))
        for number, level in enumerate(plan.levels, 1)
    }
    return [_judged(plan, key, found) for key in found[BASE]]


def _by_key(answers: Sequence[Answer]) -> dict[Key, Answer]:
    """The answers by question and unit; those alike in all by their order too."""
    seen: Counter[tuple[str, str, str]] = Counter()
    found = {}
    for answer in answers:
        what = (answer.name, answer.ask, answer.unit)
        seen[what] += 1
        found[(*what, seen[what])] = answer
    return found


def _judged(plan: Plan, key: Key, found: Answers) -> Convergence:
    answer = found[BASE][key]
    if not math.isfinite(answer.value):
        return Convergence(answer, {}, Chance(math.nan, "unknown"), plan.random)
    seeds = [
        value
        for axis in plan.axes
        if axis.name == "seeds"
        for value in (answer.value, *_values(axis, key, found))
    ]
    known = [value for value in seeds if math.isfinite(value)] or [answer.value]
    chance = chance_of(answer, known)
    errors = {}
    for axis in plan.axes:
        if axis.name != "seeds":
            errors[axis.name] = _error(plan, axis, key, found, known, chance.error)
        elif len(known) < len(seeds):
            errors["seeds"] = nothing_told(len(known), len(seeds))
        else:
            errors["seeds"] = error_of_chance(seeds)
    return Convergence(answer, errors, chance, plan.random)


def _error(
    plan: Plan, axis: Axis, key: Key, found: Answers, replicas: Sequence[float], by_chance: float
) -> AxisError:
    chance = 0.0 if math.isnan(by_chance) else by_chance
    value = replicas[0]
    values = _values(axis, key, found)
    known = [each for each in values if math.isfinite(each)]
    if len(known) < len(values):
        return nothing_told(1 + len(known), 1 + len(values))
    named = list(zip(axis.levels, values, strict=True))
    same_seed = [each for level, each in named if level.replica == 1]
    more = [each for level, each in named if level.replica != 1]
    if axis.name == "step":
        along = (value, *same_seed)
        return error_of_step(along, plan.step_lengths, plan.scheme_order, chance, replicas, more)
    if axis.name == "weight":
        finer = chance * _relative(key, found, axis.levels)
        return error_of_weight(replicas, values, (chance, finer), axis.left)
    direct = "coulomb.method=direct" in axis.levels[0].settings
    words = "difference to the direct sum" if direct else "difference"
    return error_of_one(value, same_seed[0], chance, replicas, words, more)


def _relative(key: Key, found: Answers, finer: Sequence[Level]) -> float:
    """Sampling errors of finer runs, root mean square, over the judged run's; 1 if unknown."""
    base = found[BASE][key].error
    errors = [found[level][key].error for level in finer]
    told = [error for error in errors if error is not None and math.isfinite(error)]
    if not base or not told:
        return 1.0
    return math.hypot(*told) / math.sqrt(len(told)) / base


def _values(axis: Axis, key: Key, found: Answers) -> list[float]:
    """The values of an axis's runs; not a number where there is none."""
    answers = (found[level].get(key) for level in axis.levels)
    return [math.nan if answer is None else answer.value for answer in answers]
