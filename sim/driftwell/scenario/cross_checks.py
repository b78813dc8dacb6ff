"""Values that must fit together across sections: times, sizes, places, numbers of charges."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.bunch_frames import grouped
from driftwell.electrodes.faults import electrode_faults
from driftwell.errors import ScenarioError
from driftwell.forms import spelled
from driftwell.forms.faults import Fault
from driftwell.images.electrodes import ElectrodeImages
from driftwell.particles.cloud import Amount
from driftwell.particles.species import bodies
from driftwell.particles.state import LARGEST_COUNT, Particles
from driftwell.scenario.cell_checks import cell_faults, folded
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.model import Scenario
from driftwell.scenario.process_faults import process_faults
from driftwell.stepping.schemes import MIDWAY

MOST_RECORDS = 1_000_000
MOST_STEPS = 1e13
_FEW = 100_000
_SAME_TIME = 1e-9
_TOLD = 5


def cross_faults(scenario: Scenario, folder: Path) -> list[Fault]:
    """Faults of a scenario whose keys are all well on their own and whose names all exist."""
    faults = [*_time_faults(scenario), *_question_faults(scenario), *_image_faults(scenario)]
    faults += cell_faults(scenario)
    of_electrodes = electrode_faults(scenario.electrodes, scenario.electrode, folder)
    faults += of_electrodes
    if scenario.coulomb.softening >= scenario.stepping.extent:
        limit = spelled(scenario.stepping.extent, "m")
        text = f"must be less than [stepping] extent, {limit}, and far less than any cloud"
        faults.append(Fault(("coulomb", "softening"), "", text))
    faults += process_faults(scenario)
    faults += [
        Fault(("field", i, *fault.path), fault.found, fault.needed)
        for i, field in enumerate(scenario.field)
        for fault in field.faults()
    ]
    faults += _frame_faults(scenario)
    known = bodies(scenario.species)
    of_clouds = [
        Fault(("cloud", i, *fault.path), fault.found, fault.needed)
        for i, cloud in enumerate(scenario.cloud)
        for fault in cloud.faults(known, folder)
    ]
    setting = scenario.setting(folder)
    of_clouds += [
        Fault(("source", i, *fault.path), fault.found, fault.needed)
        for i, source in enumerate(scenario.source)
        for fault in source.faults(setting)
    ]
    faults += _emission_faults(scenario)
    if not of_clouds:
        conductors = None if of_electrodes else Conductors.of(scenario, folder)
        of_clouds = _place_faults(scenario, folder, conductors)
    return [*faults, *of_clouds]


def _time_faults(scenario: Scenario) -> Iterator[Fault]:
    duration = scenario.duration
    whole = spelled(duration, "s")
    for section, key, value in (
        ("record", "every", scenario.record.every),
        ("record", "snapshots", scenario.record.snapshots),
        ("stepping", "step", scenario.stepping.step),
    ):
        if not isinstance(value, float):
            continue
        if value > duration:
            yield Fault((section, key), "", f"must be at most the duration, {whole}")
        elif section == "record" and duration / value > MOST_RECORDS * (1.0 + _SAME_TIME):
            text = f"would be {duration / value:.3g} times in {whole}; needs at most {MOST_RECORDS}"
            yield Fault((section, key), "", text)
        elif section == "stepping" and duration / value > MOST_STEPS * (1.0 + _SAME_TIME):
            text = f"would be {duration / value:.3g} steps in {whole}; needs at most {MOST_STEPS:g}"
            yield Fault((section, key), "", text)


def _question_faults(scenario: Scenario) -> Iterator[Fault]:
    for i, question in enumerate(scenario.question):
        for key, time in question.times().items():
            if time > scenario.duration * (1.0 + _SAME_TIME):
                whole = spelled(scenario.duration, "s")
                text = f"lies after the end of the run, {whole}"
                yield Fault(("question", i, key), "", text)


def _image_faults(scenario: Scenario) -> Iterator[Fault]:
    """Electrodes that are to answer with images, and are not there or have no end."""
    if not isinstance(scenario.images, ElectrodeImages):
        return
    if not scenario.electrode:
        yield Fault(("images", "kind"), "", "needs an [[electrode]], which would answer; none is")
    elif (
        scenario.electrodes is not None
        and scenario.electrodes.geometry == "planar"
        and scenario.images.length is None
    ):
        text = "missing; needs the length that planar electrodes, which have no end, are cut to"
        yield Fault(("images", "length"), "", text)


def _emission_faults(scenario: Scenario) -> Iterator[Fault]:
    """Sources that are to be limited by space charge, and would not know of it."""
    for i, source in enumerate(scenario.source):
        if not source.space_charge_limited:
            continue
        path = ("source", i, "space_charge_limited")
        if scenario.coulomb.method == "off":
            yield Fault(path, "true", "needs the charges' own field: [coulomb] method is off")
        if scenario.images is None:
            text = "needs [images]: without the charge they induce the surface's field is not known"
            yield Fault(path, "true", text)


def _frame_faults(scenario: Scenario) -> Iterator[Fault]:
    """What does not go with the rest frames of bunches."""
    coulomb = scenario.coulomb
    if coulomb.frame != "bunch" or coulomb.method == "off":
        return
    if scenario.images is not None:
        text = "does not go with [images], which answer to charges at rest; leave one of them out"
        yield Fault(("coulomb", "frame"), "", text)
    if scenario.source:
        text = "does not go with a [[source]], whose bunch is never all there; leave out one"
        yield Fault(("coulomb", "frame"), "", text)
    several = max(grouped([each.name for each in scenario.cloud], coulomb.share_frame)) > 0
    if several and scenario.stepping.scheme == MIDWAY:
        text = "has several frames, which do not go with midpoint-rotation; give one by share_frame"
        yield Fault(("coulomb", "frame"), "", text)
    known = bodies(scenario.species)
    signs = {known[cloud.species].charge > 0.0 for cloud in scenario.cloud}
    if several and len(signs) > 1 and coulomb.softening == 0.0:
        text = (
            "has several frames for charges of both signs, whose falling together is watched in "
            "one frame only; give a softening, or all clouds one frame by share_frame"
        )
        yield Fault(("coulomb", "frame"), "", text)


def _named_charge_faults(scenario: Scenario, amounts: Sequence[Amount]) -> Iterator[Fault]:
    names = [cloud.name for cloud in scenario.cloud]
    names += [source.name for source in scenario.source]
    counts = {name: amount.count for name, amount in zip(names, amounts, strict=True)}
    for i, question in enumerate(scenario.question):
        refers = question.refers_to()
        for cloud, number in refers.charges:
            if number >= counts[cloud]:
                text = (
                    f'asks for charge {number} of "{cloud}", which has {counts[cloud]}, counted '
                    "from 0"
                )
                yield Fault(("question", i, refers.charge_key), "", text)


def _place_faults(scenario: Scenario, folder: Path, conductors: Conductors | None) -> list[Fault]:
    """Faults of the charges as they are born; clouds must be without faults of their own."""
    known = bodies(scenario.species)
    setting = scenario.setting(folder)
    amounts = [cloud.amount(known, folder) for cloud in scenario.cloud]
    amounts += [source.amount(setting) for source in scenario.source]
    named = list(_named_charge_faults(scenario, amounts))
    total = sum(amount.count for amount in amounts)
    if total > LARGEST_COUNT:
        text = f"{total} charges in all clouds; needs at most {LARGEST_COUNT}: raise the weights"
        return [Fault(("cloud" if scenario.cloud else "source",), "", text)]
    if total > _FEW or named:
        return named
    faults = []
    places: list[NDArray[np.float64]] = []
    owner: list[tuple[int, int]] = []
    for i, cloud in enumerate(scenario.cloud):
        try:
            born = cloud.load(scenario.seed, known, 0, i, 0, folder)
        except ScenarioError as fault:
            faults.append(Fault(("cloud", i), "", str(fault).splitlines()[0]))
            continue
        places.append(born.position.T)
        owner += [(i, k) for k in range(len(born))]
        faults += _birth_faults(scenario, ("cloud", i), born, conductors)
    for i, source in enumerate(scenario.source):
        on = source.emitter.electrode_named()
        if on is not None and conductors is None:
            continue
        solids = () if conductors is None else conductors.own(on)
        try:
            unborn = source.load(setting, 0, i, 0, solids)
        except ScenarioError as fault:
            faults.append(Fault(("source", i), "", _without_place(str(fault), source.name)))
            continue
        faults += _birth_faults(scenario, ("source", i), unborn.particles, conductors)
    if scenario.coulomb.method != "off" and scenario.coulomb.softening == 0.0 and places:
        faults += _same_places(scenario, folded(scenario.cell, np.concatenate(places)), owner)
    return faults


def _without_place(text: str, name: str) -> str:
    """A message without the section it begins with: the reader says that."""
    return text.splitlines()[0].removeprefix(f'[[source]] "{name}": ')


def _birth_faults(
    scenario: Scenario, path: tuple[str | int, ...], born: Particles, conductors: Conductors | None
) -> Iterator[Fault]:
    """Charges that begin beyond the extent or inside an electrode."""
    x, y, z = born.position
    farthest = float(np.hypot(np.hypot(x, y), z).max(initial=0.0))
    if farthest > scenario.stepping.extent:
        text = (
            f"has charges {spelled(farthest, 'm')} from the origin, farther than "
            f"[stepping] extent, {spelled(scenario.stepping.extent, 'm')}"
        )
        yield Fault(path, "", text)
    if conductors is not None and (told := conductors.struck(born.position.T)):
        yield Fault(path, "", told)


def _same_places(
    scenario: Scenario, places: NDArray[np.float64], owner: list[tuple[int, int]]
) -> list[Fault]:
    """Charges at exactly the place of another: the force between them has no value."""
    _, first, which = np.unique(places + 0.0, axis=0, return_index=True, return_inverse=True)
    again = np.flatnonzero(first[which.ravel()] != np.arange(len(places)))
    faults = []
    for row in again[:_TOLD]:
        cloud, number = owner[row]
        other_cloud, other = owner[first[which.ravel()[row]]]
        name = scenario.cloud[other_cloud].name
        where = "" if other_cloud == cloud else f' of "{name}"'
        text = (
            f"charge {number} is exactly where charge {other}{where} is (counted from 0): move it, "
            "or give a [coulomb] softening"
        )
        faults.append(Fault(("cloud", cloud, "shape"), "", text))
    if len(again) > _TOLD:
        cloud = owner[again[_TOLD]][0]
        text = f"and {len(again) - _TOLD} more charges are exactly where others are"
        faults.append(Fault(("cloud", cloud, "shape"), "", text))
    return faults
