"""The charges as they are born, and whether they may be there."""

from __future__ import annotations

from collections.abc import Iterator, Sequence

import numpy as np

from driftwell.answers.evidence import CloudFacts
from driftwell.errors import ScenarioError
from driftwell.forms.body import Body
from driftwell.images.form import ClosedForm
from driftwell.particles.state import Particles, joined
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario
from driftwell.solved.acting import ActingField
from driftwell.solved.edges import Edges, edges_of
from driftwell.walls.table import sides, surface_table


def loaded_particles(
    loaded: LoadedScenario, bodies: dict[str, Body], names: Sequence[str]
) -> tuple[Particles, list[CloudFacts]]:
    """All charges at time zero, and the facts of their clouds."""
    scenario = loaded.scenario
    parts: list[Particles] = []
    clouds: list[CloudFacts] = []
    first_id = 0
    for index, cloud in enumerate(scenario.cloud):
        part = cloud.load(
            scenario.seed,
            bodies,
            first_id,
            index,
            names.index(cloud.species),
            loaded.folder,
        )
        body = bodies[cloud.species]
        clouds.append(
            CloudFacts(
                cloud.name,
                index,
                cloud.species,
                body.mass,
                body.charge,
                float(part.weight[0]),
                first_id,
                len(part),
            )
        )
        parts.append(part)
        first_id += len(part)
    return joined(parts), clouds


def check_births(scenario: Scenario, particles: Particles, conductors: Conductors) -> None:
    """Refuse charges born outside a wall that encloses a space, or inside an electrode."""
    for index, cloud in enumerate(scenario.cloud):
        struck = conductors.struck(particles.position.T[particles.cloud == index])
        if struck:
            raise ScenarioError(f'[[cloud]] "{cloud.name}": {struck}.')
    side = np.empty((len(scenario.wall), len(particles)), dtype=np.int8)
    sides(surface_table(scenario.wall, ()), particles.position, side)
    for wall, row in zip(scenario.wall, side, strict=True):
        outside = np.flatnonzero(row <= 0)
        if wall.closed() and outside.size:
            x, y, z = particles.position[:, outside[0]]
            born = scenario.cloud[int(particles.cloud[outside[0]])].name
            raise ScenarioError(
                f'[[cloud]] "{born}": {outside.size} of {len(particles)} charges do not begin '
                f'inside the wall "{wall.name}"; the first is at ({x:.6g}, {y:.6g}, {z:.6g}) m. '
                "Make the cloud smaller, move it, or enlarge the wall."
            )


def edges_in(scenario: Scenario, acting: ActingField | None) -> Iterator[Edges]:
    """Where fields end that are known in a region only."""
    for field in scenario.field:
        found = edges_of(field)
        if found is not None:
            yield found
    if acting is not None:
        yield acting.edges


def check_within(scenario: Scenario, particles: Particles, edges: Sequence[Edges]) -> None:
    """Refuse charges born where a field is not known."""
    for each in edges:
        outside = np.flatnonzero(each.outside(particles.position))
        if outside.size:
            x, y, z = particles.position[:, outside[0]]
            cloud = scenario.cloud[int(particles.cloud[outside[0]])].name
            raise ScenarioError(
                f'[[cloud]] "{cloud}": {outside.size} of {len(particles)} charges begin where '
                f"{each.whose} is not known; the first is at ({x:.6g}, {y:.6g}, {z:.6g}) m, and it "
                f"is known for {each.words()}. {each.remedy}."
            )


def check_sides(scenario: Scenario, particles: Particles) -> None:
    """Refuse charges born where the conductor that answers to them is, or beyond it."""
    form = scenario.images
    if not isinstance(form, ClosedForm):
        return
    outside = np.flatnonzero(~(form.distance(particles.position) > 0.0))
    if outside.size:
        x, y, z = particles.position[:, outside[0]]
        cloud = scenario.cloud[int(particles.cloud[outside[0]])].name
        raise ScenarioError(
            f'[[cloud]] "{cloud}": {outside.size} of {len(particles)} charges do not begin on the '
            f"charges' side of [images], {form.words()}; the first is at ({x:.6g}, {y:.6g}, "
            f"{z:.6g}) m. Move the cloud, or the conductor."
        )
