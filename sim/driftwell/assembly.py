"""A scenario's parts put together: charges, fields, surfaces, the step, the schedule of the run."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, TraceRequest
from driftwell.coulomb.summation import Summation
from driftwell.errors import ScenarioError
from driftwell.fields.form import FieldForm, Role
from driftwell.fields.table import field_tables
from driftwell.forms import spelled
from driftwell.forms.body import Body
from driftwell.forms.waveforms import waveform_breaks
from driftwell.images.electrodes import ElectrodeImages, electrode_images
from driftwell.images.form import ClosedForm, followed
from driftwell.images.image_sum import Images
from driftwell.particles.species import bodies as known_bodies
from driftwell.particles.state import Particles, joined
from driftwell.record.form import DEFAULT_RECORDS
from driftwell.record.header import Header, trace_name
from driftwell.record.rows import tracked_ids
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.cross_checks import MOST_STEPS
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario
from driftwell.scenario.room import Extent, Warn, extent_of, refuse_beyond_memory
from driftwell.solved.acting import ActingField, acting_field
from driftwell.stepping.loop import TimeLoop, Traced
from driftwell.stepping.motion import Fields
from driftwell.stepping.schedule import (
    BREAK,
    MOST_MARKS,
    RECORD,
    SNAPSHOT,
    TRACE,
    Schedule,
    regular,
    schedule,
)
from driftwell.stepping.step_choice import (
    Rate,
    StepChoice,
    chosen_step,
    closest_pair_rates,
    plasma_rates,
)
from driftwell.walls.form import WallForm
from driftwell.walls.table import sides, surface_table

SAMPLES_PER_PERIOD = 20.0


@dataclass(frozen=True, slots=True)
class Assembly:
    """What a run is made of, at time zero.

    species : names in the order of ``particles.species``
    clouds : facts in the order of ``particles.cloud``
    requests : the coordinates to be traced, each once
    extent : how much of everything it is
    acting : the electrodes' solved field; None without electrodes
    conductors : the electrodes as surfaces
    """

    scenario: Scenario
    bodies: dict[str, Body]
    species: tuple[str, ...]
    particles: Particles
    clouds: tuple[CloudFacts, ...]
    requests: tuple[TraceRequest, ...]
    choice: StepChoice
    schedule: Schedule
    extent: Extent
    conductors: Conductors
    acting: ActingField | None = None

    @property
    def walls(self) -> tuple[WallForm, ...]:
        """The scenario's walls, then the edges of the solved field."""
        edges = () if self.acting is None else self.acting.edges()
        return (*self.scenario.wall, *edges)

    @property
    def tracked(self) -> NDArray[np.int64]:
        """Ids of the charges whose trajectories are kept."""
        return tracked_ids(len(self.particles), self.scenario.record.tracks)

    def header(
        self, loaded: LoadedScenario, summation: Summation, threads: int, created: str
    ) -> Header:
        """What a run of it is; created : the time of day it is begun, as text."""
        scenario = self.scenario
        return Header(
            scenario=loaded.text,
            title=scenario.title,
            seed=scenario.seed,
            duration=scenario.duration,
            step=self.choice.step,
            scheme=scenario.stepping.scheme,
            softening=scenario.coulomb.softening,
            coulomb_method=summation.method,
            coulomb_because=summation.because,
            coulomb_accuracy=scenario.coulomb.accuracy,
            field_error=0.0 if self.acting is None else self.acting.solved.error,
            field_digest="" if self.acting is None else self.acting.solved.digest,
            images="" if scenario.images is None else scenario.images.words(),
            clouds=self.clouds,
            species=self.species,
            walls=(*(wall.name for wall in self.walls), *self.conductors.names),
            detectors=tuple(detector.name for detector in scenario.detector),
            tracked=tuple(int(i) for i in self.tracked),
            traces=tuple(trace_name(request) for request in self.requests),
            settings=loaded.settings,
            digest=loaded.digest,
            command=loaded.command,
            threads=threads,
            created=created,
        )

    def time_loop(
        self,
        threads: int,
        particles: Particles | None = None,
        state: Mapping[str, NDArray[Any]] | None = None,
    ) -> TimeLoop:
        """The loop that moves the charges; it works on `particles` themselves.

        particles, state : where a run is taken up, those it was left with
        """
        packed = [] if self.acting is None else self.acting.packed()
        tables = field_tables(self.scenario.field, self.bodies, packed)
        return TimeLoop(
            self.particles if particles is None else particles,
            Fields(
                electric=tables[Role.ELECTRIC],
                uniform=tables[Role.UNIFORM_MAGNETIC],
                magnetic=tables[Role.MAGNETIC],
            ),
            surface_table(self.walls, self.scenario.detector),
            self.scenario.coulomb,
            self.scenario.stepping,
            self.schedule,
            [_traced(request, self.clouds) for request in self.requests],
            threads,
            state,
            self.images(),
            self.conductors.table,
        )

    def images(self) -> Images | None:
        """The conductors that answer to the charges, made; None where none does."""
        form = self.scenario.images
        if form is None:
            return None
        if isinstance(form, ElectrodeImages):
            solids = [solid for own in self.conductors.bodies for solid in own]
            return electrode_images(solids, form.panels, form.length)
        if not isinstance(form, ClosedForm):
            return None
        particles = self.particles
        kick = self.choice.step * self.scenario.stepping.coulomb_every
        charge, mass = particles.charge * particles.weight, particles.mass * particles.weight
        away = form.distance(particles.position)
        return form.images(followed(kick, charge, mass, particles.velocity, away))


def assembled(
    loaded: LoadedScenario, warn: Warn | None = None, told: Warn | None = None
) -> Assembly:
    """Put a scenario together; the field of its electrodes is solved where it is not kept.

    warn : where given, it is told that the run would not fit in memory, and nothing is refused
    told : where given, it is told how the electrodes' field comes about

    Raises
    ------
    ScenarioError
        The charges cannot be placed as the scenario says, or the run would not fit in memory.
    """
    scenario = loaded.scenario
    bodies = known_bodies(scenario.species)
    species = tuple(dict.fromkeys(cloud.species for cloud in scenario.cloud))
    charges = scenario.charges(loaded.folder)
    warned = refuse_beyond_memory(extent_of(scenario, charges), warn)
    particles, clouds = _loaded_particles(loaded, bodies, species)
    conductors = Conductors.of(scenario, loaded.folder)
    _check_births(scenario, particles, conductors)
    acting = acting_field(scenario, loaded.folder, told)
    if acting is not None:
        _check_within(scenario, particles, acting)
    _check_sides(scenario, particles)
    requests = _traces(scenario)
    choice, every = _steps(scenario, bodies, species, particles, requests, acting)
    samples = scenario.duration / every if requests else 0.0
    extent = extent_of(scenario, charges, int(samples), len(requests))
    if not warned:
        refuse_beyond_memory(extent, warn)
    plan = _schedule(scenario, choice.step, bool(requests), every, acting)
    return Assembly(
        scenario,
        bodies,
        species,
        particles,
        tuple(clouds),
        tuple(requests),
        choice,
        plan,
        _counted(extent, plan),
        conductors,
        acting,
    )


def _counted(extent: Extent, plan: Schedule) -> Extent:
    """The extent with the records, samples and snapshots that the schedule really has."""
    records, samples, snapshots = (
        int(np.count_nonzero(plan.flags & flag)) for flag in (RECORD, TRACE, SNAPSHOT)
    )
    return replace(extent, records=records, samples=samples, snapshots=snapshots)


def _loaded_particles(
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


def _check_births(scenario: Scenario, particles: Particles, conductors: Conductors) -> None:
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


def _check_within(scenario: Scenario, particles: Particles, acting: ActingField) -> None:
    """Refuse charges born where the electrodes' field is not known."""
    outside = np.flatnonzero(acting.outside(particles.position))
    if outside.size:
        x, y, z = particles.position[:, outside[0]]
        cloud = scenario.cloud[int(particles.cloud[outside[0]])].name
        raise ScenarioError(
            f'[[cloud]] "{cloud}": {outside.size} of {len(particles)} charges begin where the '
            f"electrodes' field is not worked out; the first is at ({x:.6g}, {y:.6g}, {z:.6g}) m, "
            f"and the field is known for {acting.solved.where()}. Give [electrodes] a larger "
            "`region`, or move the cloud."
        )


def _check_sides(scenario: Scenario, particles: Particles) -> None:
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


def _traces(scenario: Scenario) -> list[TraceRequest]:
    """The coordinates all questions want traced, each once."""
    requests: dict[str, TraceRequest] = {}
    for question in scenario.question:
        for request in question.needs(scenario.duration).traces:
            name = trace_name(request)
            known = requests.get(name)
            if known is None or (request.every or math.inf) < (known.every or math.inf):
                requests[name] = request
    return list(requests.values())


def _traced(request: TraceRequest, clouds: Sequence[CloudFacts]) -> Traced:
    facts = next(cloud for cloud in clouds if cloud.name == request.cloud)
    charge = None if request.charge is None else facts.first_id + request.charge
    return Traced(facts.index, charge, request.axis)


def _steps(
    scenario: Scenario,
    bodies: dict[str, Body],
    names: Sequence[str],
    particles: Particles,
    requests: Sequence[TraceRequest],
    acting: ActingField | None,
) -> tuple[StepChoice, float]:
    """The step, and the time between samples of the traces."""
    stepping = scenario.stepping
    rates = [
        Rate(f'{name} of field "{field.name}" on {species}', value)
        for field in scenario.field
        for species in names
        for name, value in _rates_of(field, bodies[species], bodies).items()
    ]
    if acting is not None:
        rates += _rates_in(acting, bodies, names, particles)
    fastest = max((rate.rate for rate in rates), default=0.0)
    every = min((request.every for request in requests if request.every), default=math.inf)
    if any(request.every is None for request in requests):
        period = 2.0 * math.pi / fastest if fastest > 0.0 else scenario.duration / 500.0
        every = min(every, period / SAMPLES_PER_PERIOD)
    if stepping.step != "auto":
        choice = StepChoice(float(stepping.step), "the scenario says so")
    else:
        if scenario.coulomb.method != "off":
            rates += plasma_rates(particles)
            rates += closest_pair_rates(particles, scenario.coulomb.softening)
        mark = min(every, scenario.record.every or scenario.duration / DEFAULT_RECORDS)
        choice = chosen_step(rates, stepping.steps_per_period, scenario.duration, mark)
    _refuse_too_many(scenario.duration, choice, every)
    return choice, every


def _rates_of(field: FieldForm, body: Body, bodies: dict[str, Body]) -> dict[str, float]:
    """How fast a body moves in a field, rad/s, by what it does."""
    try:
        field.packed(bodies)
        return dict(field.rates(body, bodies))
    except ArithmeticError as fault:
        raise ScenarioError(
            f'[[field]] "{field.name}": its numbers, or the motion of {body.name} in it, are too '
            "large or too small to compute with; check its strength and its sizes."
        ) from fault


def _rates_in(
    acting: ActingField, bodies: Mapping[str, Body], names: Sequence[str], particles: Particles
) -> list[Rate]:
    """How fast charges move in the electrodes' field."""
    speed = np.linalg.norm(particles.velocity, axis=0)
    return [
        Rate(f"{name} of {species} in the electrodes' field", value)
        for number, species in enumerate(names)
        for name, value in acting.rates(
            bodies[species], float(speed[particles.species == number].max(initial=0.0))
        ).items()
    ]


def _refuse_too_many(duration: float, choice: StepChoice, every: float) -> None:
    """Refuse more samples or steps than a run could ever take."""
    whole = spelled(duration, "s")
    if duration > every * MOST_MARKS:
        raise ScenarioError(
            f"duration = {whole}: the questions about oscillations would take "
            f"{_parts(duration, every)} samples, one every {spelled(every, 's', 4)}; needs at most "
            f"{MOST_MARKS}. Shorten the duration, or give these questions a longer `every`."
        )
    if duration > choice.step * MOST_STEPS:
        raise ScenarioError(
            f"duration = {whole}: would be {_parts(duration, choice.step)} steps of "
            f"{spelled(choice.step, 's', 4)} ({choice.because}); needs at most "
            f"{MOST_STEPS:g}. Shorten the duration, or give [stepping] a longer step."
        )


def _parts(whole: float, part: float) -> str:
    return f"{whole / part:.3g}" if part > 0.0 and math.isfinite(whole / part) else "countless"


def _schedule(
    scenario: Scenario, step: float, traced: bool, every: float, acting: ActingField | None
) -> Schedule:
    """All marks of the run."""
    duration = scenario.duration
    records = regular(scenario.record.every or duration / DEFAULT_RECORDS, duration)
    snapshots = [np.array([0.0, duration])]
    if scenario.record.snapshots is not None:
        snapshots.append(regular(scenario.record.snapshots, duration))
    snapshots += [
        np.array(question.needs(duration).snapshots, dtype=np.float64)
        for question in scenario.question
    ]
    breaks = [waveform_breaks(field.waveform(), duration) for field in scenario.field]
    breaks += [] if acting is None else acting.breaks(duration)
    marks: list[tuple[int, NDArray[np.float64]]] = [
        (RECORD, records),
        (SNAPSHOT, np.concatenate(snapshots)),
        (BREAK, np.array([time for times in breaks for time in times])),
    ]
    if traced:
        samples = regular(every, duration)
        even = np.abs(np.diff(samples, prepend=-every) - every) < 1e-6 * every
        marks.append((TRACE, samples[even]))
    return schedule(duration, step, marks, scenario.stepping.coulomb_every)
