"""What is wrong with processes beside the rest of a scenario."""

from __future__ import annotations

from collections.abc import Iterator

from driftwell.forms import spelled
from driftwell.forms.faults import Fault
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
    dragged: dict[str, str] = {}
    for i, process in enumerate(scenario.process):
        if process.start >= scenario.duration:
            whole = spelled(scenario.duration, "s")
            yield Fault(("process", i, "start"), "", f"lies not before the end of the run, {whole}")
        clouds = [
            each
            for each in (*scenario.cloud, *scenario.source)
            if process.acts_on(each.name, each.species)
        ]
        if not clouds:
            yield Fault(("process", i, "of"), "", "acts on no cloud: none is of that species")
        names = dict.fromkeys(cloud.species for cloud in clouds)
        for fault in process.faults(tuple(known[name] for name in names)):
            yield Fault(("process", i, *fault.path), fault.found, fault.needed)
        for cloud in clouds if process.is_continuous() else ():
            if cloud.name in dragged:
                text = (
                    f'is drag on "{cloud.name}" beside "{dragged[cloud.name]}"; only one of '
                    "mobility-drag, stokes-drag and thermostat may act on a cloud: join them in "
                    "one, or name others with `of`"
                )
                yield Fault(("process", i, "kind"), f'"{process.name}"', text)
            dragged[cloud.name] = process.name
