"""What hand calculations look at: the scenario with its clouds as they begin."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from driftwell.answers.kinds.plasma import CouplingParameter, DebyeLength
from driftwell.assembly import Assembly
from driftwell.forms.body import Body
from driftwell.forms.faults import read_form
from driftwell.hand.group import Group
from driftwell.particles.cloud import Cloud
from driftwell.particles.source import Source
from driftwell.particles.species import bodies as known_bodies
from driftwell.scenario.model import Scenario
from driftwell.scenario.settings import apply_settings
from driftwell.scenario.source import raw_table
from driftwell.walls.plane import PlaneDetector

if TYPE_CHECKING:
    from driftwell.record.reader import Run


@dataclass(frozen=True)
class Scene:
    """A scenario and its clouds; sources are looked up in the scenario.

    bodies : species by name
    """

    scenario: Scenario
    bodies: dict[str, Body]
    groups: tuple[Group, ...]

    @property
    def moving(self) -> tuple[Cloud | Source, ...]:
        """The clouds, then the sources."""
        return (*self.scenario.cloud, *self.scenario.source)

    @property
    def detectors(self) -> list[PlaneDetector]:
        """The flat detectors."""
        return [each for each in self.scenario.detector if isinstance(each, PlaneDetector)]

    def detector(self, name: str) -> PlaneDetector | None:
        """The flat detector of a name; None where there is none."""
        return next((each for each in self.detectors if each.name == name), None)

    @property
    def kinds(self) -> list[Body]:
        """Every species that moves, each once."""
        names = [each.species for each in self.moving]
        return [self.bodies[name] for name in dict.fromkeys(names)]

    @property
    def fieldless(self) -> bool:
        """Whether nothing pushes the charges from outside."""
        scenario = self.scenario
        return not (scenario.field or scenario.electrode or scenario.process or scenario.cell)

    def group(self, name: str) -> Group | None:
        """The cloud of a name; None where there is none."""
        return next((group for group in self.groups if group.name == name), None)

    def warm_start(self, question: DebyeLength | CouplingParameter) -> tuple[Group, float] | None:
        """The warm cloud asked about at the start, and its density, 1/m^3; None where its shape
        says none."""
        group = self.group(question.of)
        if question.at != "start" or group is None or group.temperature <= 0.0:
            return None
        if not group.solid or not group.peak_known:
            return None
        uniform = question.density == "uniform"
        return group, group.uniform_density if uniform else group.peak_density

    def alone(self, group: Group) -> bool:
        """Whether no other cloud or source is there, and charges push each other."""
        return (
            self.groups == (group,)
            and not self.scenario.source
            and self.scenario.coulomb.method != "off"
        )


def scene_of(parts: Assembly) -> Scene:
    """The scene of a scenario that was put together."""
    placed, groups = parts.particles, []
    for facts, cloud in zip(parts.clouds, parts.scenario.cloud, strict=False):
        own = slice(facts.first_id, facts.first_id + facts.count)
        groups.append(
            Group(
                cloud,
                parts.bodies[cloud.species],
                facts.weight,
                placed.position[:, own],
                placed.velocity[:, own],
            )
        )
    return Scene(parts.scenario, parts.bodies, tuple(groups))


def scene_of_run(run: Run) -> Scene | None:
    """The scene a run began with; None where its scenario cannot be read any more.

    Files that the scenario names are not needed: charges are those of the first snapshot.
    """
    header = run.header
    data = raw_table(header.scenario, "the run's scenario")
    _, unusable = apply_settings(data, header.settings, Scenario)
    scenario, faults = read_form(Scenario, data)
    if unusable or faults or scenario is None:
        return None
    known = known_bodies(scenario.species)
    first = run.snapshot(0.0)
    groups = []
    for facts, cloud in zip(header.clouds, scenario.cloud, strict=False):
        own = first.cloud == facts.index
        groups.append(
            Group(
                cloud,
                known[cloud.species],
                facts.weight,
                first.position[own].T,
                first.velocity[own].T,
            )
        )
    return Scene(scenario, known, tuple(groups))
