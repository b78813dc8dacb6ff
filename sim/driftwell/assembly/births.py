"""The charges at the start and those to be born, and whether they may be there."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts
from driftwell.coulomb.cell import Cell
from driftwell.errors import ScenarioError
from driftwell.forms import spelled
from driftwell.forms.body import Body
from driftwell.images.form import ClosedForm
from driftwell.particles.state import Particles, joined, no_particles
from driftwell.particles.unborn import Unborn, all_unborn
from driftwell.scenario.cell_checks import WIDEST, folded
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
    return joined(parts) if parts else no_particles(), clouds


def loaded_unborn(
    loaded: LoadedScenario,
    bodies: dict[str, Body],
    names: Sequence[str],
    conductors: Conductors,
    first_id: int,
) -> tuple[Unborn | None, list[CloudFacts]]:
    """All charges that sources will bear, and the facts of these; None where there is no source.

    first_id : the id of the first of them
    """
    scenario = loaded.scenario
    setting = scenario.setting(loaded.folder)
    parts: list[Unborn] = []
    facts: list[CloudFacts] = []
    for number, source in enumerate(scenario.source):
        index, body = len(scenario.cloud) + number, bodies[source.species]
        solids = conductors.own(source.emitter.electrode_named())
        part = source.load(setting, first_id, index, names.index(source.species), solids)
        weight = source.amount(setting).weight
        facts.append(
            CloudFacts(
                source.name,
                index,
                source.species,
                body.mass,
                body.charge,
                weight,
                first_id,
                len(part),
                emitted=True,
            )
        )
        parts.append(part)
        first_id += len(part)
    return all_unborn(parts) if parts else None, facts


def check_births(scenario: Scenario, particles: Particles, conductors: Conductors) -> None:
    """Refuse charges born outside a wall that encloses a space, or inside an electrode."""
    for index in range(len(scenario.cloud) + len(scenario.source)):
        struck = conductors.struck(particles.position.T[particles.cloud == index])
        if struck:
            raise ScenarioError(f"{_group(scenario, index)}: {struck}.")
    side = np.empty((len(scenario.wall), len(particles)), dtype=np.int8)
    sides(surface_table(scenario.wall, ()), particles.position, side)
    for wall, row in zip(scenario.wall, side, strict=True):
        if wall.closed():
            _refuse_any(
                scenario,
                particles,
                row <= 0,
                f'do not begin inside the wall "{wall.name}"',
                "Make the cloud smaller, move it, or enlarge the wall.",
            )


def _refuse_any(
    scenario: Scenario, particles: Particles, wrong: NDArray[np.bool_], how: str, remedy: str
) -> None:
    """Refuse the first of the charges that begin wrongly, if any; says how many, and what to do."""
    those = np.flatnonzero(wrong)
    if those.size:
        x, y, z = particles.position[:, those[0]]
        group = _group(scenario, int(particles.cloud[those[0]]))
        raise ScenarioError(
            f"{group}: {those.size} of {len(particles)} charges {how}; the first is at "
            f"({x:.6g}, {y:.6g}, {z:.6g}) m. {remedy}"
        )


def _group(scenario: Scenario, index: int) -> str:
    """A cloud or a source as messages name it."""
    clouds = len(scenario.cloud)
    if index < clouds:
        return f'[[cloud]] "{scenario.cloud[index].name}"'
    return f'[[source]] "{scenario.source[index - clouds].name}"'


def put_in_cell(cell: Cell | None, particles: Particles) -> str | None:
    """Put charges that begin beyond an end of the cell back into it; what the user should know.

    Raises ScenarioError where the charges are too far apart across the axis for its images.
    """
    if cell is None:
        return None
    x = particles.position
    across = np.delete(x, cell.number, axis=0)
    width = math.hypot(*(across.max(axis=1) - across.min(axis=1)))
    if width > WIDEST * cell.length:
        raise ScenarioError(
            f"[cell] length: the charges are {spelled(width, 'm')} apart across the axis, more "
            f"than {WIDEST:g} times the length, {spelled(cell.length, 'm')}; images are not summed "
            "so far to the side. Take a longer cell with more charges."
        )
    inside = folded(cell, x.T).T[cell.number]
    moved = int(np.count_nonzero(inside != x[cell.number]))
    x[cell.number] = inside
    if moved == 0:
        return None
    return f"{moved} of {len(particles)} charges begin outside the cell and are put back into it."


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
        _refuse_any(
            scenario,
            particles,
            each.outside(particles.position),
            f"begin where {each.whose} is not known",
            f"It is known for {each.words()}. {each.remedy}.",
        )


def check_sides(scenario: Scenario, particles: Particles) -> None:
    """Refuse charges born where the conductor that answers to them is, or beyond it."""
    form = scenario.images
    if isinstance(form, ClosedForm):
        _refuse_any(
            scenario,
            particles,
            ~(form.depth(particles.position) > 0.0),
            f"do not begin on the charges' side of [images], {form.words()}",
            "Move the cloud, or the conductor.",
        )
