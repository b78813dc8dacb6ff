"""From the entries of a study to its axes and cases: grids, entries together, samples, replicas.

Nothing here reads a file or looks at more of the scenario than what its keys may hold.
"""

from __future__ import annotations

import itertools
import math
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np

from driftwell.forms.faults import Fault
from driftwell.forms.wording import as_found, toml_text
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import path_of, setting_path, setting_text
from driftwell.study.axis import PURE, Held, Range, Steps, Value, held_by, listed, range_of
from driftwell.study.form import MOST_CASES, StudyForm, Vary

Path = tuple[str | int, ...]

SEED_BITS = 53
"""Bits of a derived seed: every program that reads tables keeps such a number exactly."""
_DEFAULT_SEED = 1


@dataclass(frozen=True, slots=True)
class Axis:
    """One key that varies, with its different values in the order of the cases.

    name : the key, as the study has it
    values : SI numbers, or texts where not all are numbers
    unit : SI unit of the numbers; "1": plain numbers; empty: texts
    log : a range of equal ratios
    group : axes of the same group advance together; those of a sample are one group
    entry : number of its ``[[vary]]``, counted from 0
    listed : its values are a list, not a range
    """

    name: str
    values: tuple[Value, ...]
    unit: str
    log: bool
    group: int
    entry: int
    listed: bool


@dataclass(frozen=True, slots=True)
class Case:
    """One run of the study.

    number : counted from 1
    settings : ``key=value`` that make the scenario this case's
    values : one for each axis, as they stand in the axis
    replica : counted from 1
    """

    number: int
    settings: tuple[str, ...]
    values: tuple[Value, ...]
    replica: int


@dataclass(frozen=True, slots=True)
class _Entry:
    """A ``[[vary]]`` whose key is in the scenario and whose values are known, or its range."""

    index: int
    form: Vary
    held: Held
    values: Steps | Range

    def where(self, *more: str | int) -> Path:
        return ("vary", self.index, *more)


def expand(
    form: StudyForm, data: Mapping[str, Any], settings: Sequence[str] = ()
) -> tuple[tuple[Axis, ...], tuple[Case, ...], list[Fault]]:
    """Axes and cases of a study, or all its faults, with paths in the study's raw table.

    data : the scenario's raw table, with `settings` put in
    settings : what holds in all cases
    """
    entries, faults = _entries(form, data)
    faults += _key_faults(form, entries, data, settings)
    if not form.vary and form.replicas == 1:
        faults.append(Fault(("vary",), "", "missing; a study varies a key, or has replicas"))
    if form.sample is not None and all(entry.values is not None for entry in form.vary):
        text = "nothing to sample; needs a [[vary]] with `from` and `to`"
        faults.append(Fault(("sample",), "", text))
    if len(entries) < len(form.vary):
        return (), (), faults
    groups, more = _groups(entries)
    faults += more
    if not faults:
        faults += _too_many(form, groups)
    if faults:
        return (), (), faults
    stepped, order = _ordered(form, groups)
    faults += [fault for entry in stepped for fault in _twice(entry, form.sample is not None)]
    if not faults and form.sample is not None:
        faults += _same_point_faults(stepped, order)
    if faults:
        return (), (), faults
    axes = tuple(_axis(entry, group) for entry, group in zip(stepped, order.groups, strict=True))
    seeds = replica_seeds(own_seed(data), form.replicas)
    return axes, tuple(_cases(stepped, order, settings, seeds)), []


def replica_seeds(seed: int, count: int) -> tuple[int, ...]:
    """Seeds of all replicas: the first has the scenario's own, each further one its own of it.

    They depend on that seed and on the replica's number only, so that more replicas later leave
    those before as they are.

    References
    ----------
    M. E. O'Neill, "Developing a seed_seq alternative" (2015), as in numpy's ``SeedSequence``.
    """
    drawn = (
        np.random.SeedSequence(entropy=seed, spawn_key=(number,)).generate_state(1, np.uint64)[0]
        for number in range(1, count)
    )
    return (seed, *(int(each) >> (64 - SEED_BITS) for each in drawn))


def own_seed(data: Mapping[str, Any]) -> int:
    """The seed in a scenario's raw table."""
    seed = data.get("seed", _DEFAULT_SEED)
    return seed if isinstance(seed, int) and seed >= 0 else _DEFAULT_SEED


def _entries(form: StudyForm, data: Mapping[str, Any]) -> tuple[list[_Entry], list[Fault]]:
    entries, faults = [], []
    for index, vary in enumerate(form.vary):
        path: Path = ("vary", index)
        try:
            held = held_by(path_of(vary.setting, data, Scenario), data)
        except LookupError as fault:
            faults.append(Fault((*path, "key"), "", str(fault)))
            continue
        if vary.values is not None:
            entries.append(_Entry(index, vary, held, listed(vary, held)))
            continue
        found = range_of(vary, held, path)
        if isinstance(found, Range):
            entries.append(_Entry(index, vary, held, found))
        else:
            faults += found
        faults += _points_faults(vary, path, form.sample is not None)
    return entries, faults


def _points_faults(vary: Vary, path: Path, sampled: bool) -> Iterator[Fault]:
    if sampled and vary.points is not None:
        text = "[sample] says how many points there are; leave this out"
        yield Fault((*path, "points"), "", text)
    if not sampled and vary.points is None:
        yield Fault((*path, "points"), "", "missing; needs the number of values, such as 5")


def _key_faults(
    form: StudyForm, entries: Sequence[_Entry], data: Mapping[str, Any], settings: Sequence[str]
) -> Iterator[Fault]:
    """Keys that two entries vary, that a setting fixes, or that replicas need."""
    for i, entry in enumerate(entries):
        key = entry.held.path
        for other in entries[:i]:
            if _within(key, other.held.path) or _within(other.held.path, key):
                text = (
                    f"[[vary]] number {other.index + 1} varies this already"
                    if key == other.held.path
                    else f"one holds the other: [[vary]] number {other.index + 1} varies "
                    f"{as_found(other.form.setting)}"
                )
                yield Fault(entry.where("key"), "", text)
                break
        for setting in settings:
            if _within(setting_path(setting, data, Scenario), key):
                text = f"the setting {as_found(setting)} would be undone; leave one of the two out"
                yield Fault(entry.where("key"), "", text)
        if key == ("seed",) and form.replicas > 1:
            text = "replicas have seeds of their own; leave out one of the two"
            yield Fault(entry.where("key"), "", text)


def _within(path: Path | None, other: Path) -> bool:
    return path is not None and path[: len(other)] == other


@dataclass(frozen=True, slots=True)
class _Group:
    """Entries that advance together."""

    entries: tuple[_Entry, ...]
    length: int | None  # None: as many as the sample has


def _groups(entries: Sequence[_Entry]) -> tuple[list[_Group], list[Fault]]:
    """The groups in the order of their first entries."""
    by_word: dict[object, list[_Entry]] = {}
    for entry in entries:
        by_word.setdefault(entry.form.together or entry.index, []).append(entry)
    faults: list[Fault] = []
    groups = []
    for word, members in by_word.items():
        first = members[0]
        if isinstance(word, str) and len(members) == 1:
            text = "no other [[vary]] has this word; give it to all that advance together"
            faults.append(Fault(first.where("together"), "", text))
        for other in members[1:]:
            faults += _together_faults(first, other)
        groups.append(_Group(tuple(members), _length(first)))
    return groups, faults


def _length(entry: _Entry) -> int | None:
    return len(entry.values) if isinstance(entry.values, Steps) else entry.form.points


def _together_faults(first: _Entry, other: _Entry) -> Iterator[Fault]:
    number = f"[[vary]] number {first.index + 1}"
    counts = _length(first), _length(other)
    if counts[0] == counts[1]:
        return
    if None in counts:
        text = f"joins a list with a range that [sample] draws, {number}; give both as ranges"
    else:
        text = f"has {counts[1]} values and {number} has {counts[0]}; needs as many in both"
    yield Fault(other.where("together"), "", text)


def _too_many(form: StudyForm, groups: Sequence[_Group]) -> Iterator[Fault]:
    counts = [group.length for group in groups if group.length is not None]
    if form.sample is not None:
        counts.append(form.sample.points)
    total = math.prod(counts) * form.replicas
    if total > MOST_CASES:
        product = " x ".join(map(str, counts))
        more = f" and {form.replicas} replicas of each" if form.replicas > 1 else ""
        text = f"{product} values{more} are {total} cases; needs at most {MOST_CASES}"
        yield Fault(("vary",), "", text)


@dataclass(frozen=True, slots=True)
class _Stepped:
    """An entry with its values, a sample's too."""

    entry: _Entry
    steps: Steps
    texts: tuple[str, ...]
    log: bool


@dataclass(frozen=True, slots=True)
class _Order:
    """Which step each entry is at, point after point.

    groups : for each entry, the number of the group it advances with
    lengths : of each group
    """

    groups: tuple[int, ...]
    lengths: tuple[int, ...]

    def points(self) -> Iterator[tuple[int, ...]]:
        """For each point the step of each entry; the last group changes fastest."""
        for at in itertools.product(*map(range, self.lengths)):
            yield tuple(at[group] for group in self.groups)


def _ordered(form: StudyForm, groups: Sequence[_Group]) -> tuple[list[_Stepped], _Order]:
    """All entries in the file's order with their values; those sampled are one last group."""
    sampled = [group for group in groups if group.length is None]
    gridded = [group for group in groups if group.length is not None]
    lengths = [group.length for group in gridded if group.length is not None]
    found: list[tuple[_Stepped, int]] = []
    for number, group in enumerate(gridded):
        shares = [k / max(1, lengths[number] - 1) for k in range(lengths[number])]
        found += [(_stepped(entry, shares), number) for entry in group.entries]
    if form.sample is not None and sampled:
        points = latin_hypercube(form.sample.points, len(sampled), form.sample.seed)
        for group, column in zip(sampled, points.T.tolist(), strict=True):
            found += [(_stepped(entry, column), len(gridded)) for entry in group.entries]
        lengths.append(form.sample.points)
    found.sort(key=lambda pair: pair[0].entry.index)
    order = _Order(tuple(number for _, number in found), tuple(lengths))
    return [stepped for stepped, _ in found], order


def latin_hypercube(points: int, dimensions: int, seed: int) -> Any:
    """Points in the unit cube, (points, dimensions): each axis's every part of 1/points met once.

    References
    ----------
    M. D. McKay, R. J. Beckman, W. J. Conover, Technometrics 21 (1979) 239.
    """
    from scipy.stats import qmc

    return qmc.LatinHypercube(dimensions, rng=seed).random(points)


def _stepped(entry: _Entry, shares: Sequence[float]) -> _Stepped:
    values = entry.values
    steps = values.steps(shares) if isinstance(values, Range) else values
    texts = tuple(setting_text(entry.form.setting, raw) for raw in steps.raw)
    return _Stepped(entry, steps, texts, isinstance(values, Range) and values.log)


def _twice(stepped: _Stepped, sampled: bool) -> Iterator[Fault]:
    """Values that an entry has twice; a sample may meet a whole number several times."""
    entry = stepped.entry
    if isinstance(entry.values, Range):
        different = len(set(stepped.steps.values))
        if not sampled and different < len(stepped.steps):
            text = f"gives {different} different values only; needs fewer points"
            yield Fault(entry.where("points"), "", text)
        return
    first: dict[Any, int] = {}
    for k, (value, raw) in enumerate(zip(stepped.steps.values, stepped.steps.raw, strict=True)):
        same = value if isinstance(value, float) else toml_text(raw)
        if same in first:
            text = f"stands in this list already, as entry {first[same] + 1}"
            yield Fault(entry.where("values", k), "", text)
        else:
            first[same] = k


def _same_point_faults(stepped: Sequence[_Stepped], order: _Order) -> Iterator[Fault]:
    seen = set()
    count = 0
    for point in order.points():
        count += 1
        seen.add(tuple(each.steps.values[k] for each, k in zip(stepped, point, strict=True)))
    if len(seen) < count:
        text = f"{count - len(seen)} cases would be the same as others; needs fewer points"
        yield Fault(("sample", "points"), "", text)


def _axis(stepped: _Stepped, group: int) -> Axis:
    values = tuple(dict.fromkeys(stepped.steps.values))
    numbers = all(isinstance(value, float) for value in values)
    entry = stepped.entry
    return Axis(
        entry.form.setting,
        values,
        (entry.held.unit or PURE) if numbers else "",
        stepped.log,
        group,
        entry.index,
        isinstance(entry.values, Steps),
    )


def _cases(
    stepped: Sequence[_Stepped], order: _Order, settings: Sequence[str], seeds: Sequence[int]
) -> Iterator[Case]:
    own = [(), *((setting_text("seed", seed),) for seed in seeds[1:])]
    number = 0
    for point in order.points():
        at = list(zip(stepped, point, strict=True))
        texts = (*settings, *(each.texts[k] for each, k in at))
        values = tuple(each.steps.values[k] for each, k in at)
        for replica, seed in enumerate(own, 1):
            number += 1
            yield Case(number, texts + seed, values, replica)
