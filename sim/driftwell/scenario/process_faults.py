"""What is wrong with processes beside the rest of a scenario."""

from __future__ import annotations

from collections.abc import Iterator

from driftwell.forms import spelled
from driftwell.forms.faults import Fault
from driftwell.particles.cloud import Cloud
from driftwell.particles.source import Source
from driftwell.particles.species import bodies
from driftwell.scenario.model import Scenario

ONE_DRIFT = ("kick-drift-kick",)
"""Schemes whose steps have one drift, forward in time."""


def process_faults(scenario: Scenario) -> Iterator[Fault]:
    """Faults of processes whose keys are all well on their own and whose names all exist."""
    if scenario.process and scenario.stepping.scheme not in ONE_DRIFT:
        text = (
            f'is no scheme for [[process]] entries: it drifts back in time; needs "{ONE_DRIFT[0]}"'
        )
        yield Fault(("stepping", "scheme"), f'"{scenario.stepping.scheme}"', text)
    known = bodies(scenario.species)
    there: list[Cloud | Source] = [*scenario.cloud, *scenario.source]
    dragged: dict[str, str] = {}
    for i, process in enumerate(scenario.process):
        if process.start >= scenario.duration:
            whole = spelled(scenario.duration, "s")
            yield Fault(("process", i, "start"), "", f"lies not before the end of the run, {whole}")
        groups = [each for each in there if process.acts_on(each.name, each.species)]
        if not groups:
            text = "acts on no cloud and no source: none is of that species"
            yield Fault(("process", i, "of"), "", text)
        names = dict.fromkeys(group.species for group in groups)
        for fault in process.faults(tuple(known[name] for name in names)):
            yield Fault(("process", i, *fault.path), fault.found, fault.needed)
        for group in groups if process.is_continuous() else ():
            if group.name in dragged:
                text = (
                    f'is drag on "{group.name}" beside "{dragged[group.name]}"; only one of '
                    "mobility-drag, stokes-drag and thermostat may act on a cloud or source: join "
                    "them in one, or name others with `of`"
                )
                yield Fault(("process", i, "kind"), f'"{process.name}"', text)
            dragged[group.name] = process.name
