"""A scenario's parts put together: charges, fields, surfaces, the step, the schedule of the run."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, TraceRequest
from driftwell.assembly.answering import answering, asked_of_images, closest_to
from driftwell.assembly.births import (
    check_births,
    check_sides,
    check_within,
    edges_in,
    loaded_particles,
    loaded_unborn,
    put_in_cell,
)
from driftwell.assembly.given_fields import check_given
from driftwell.assembly.marks import all_marks, all_traces, traced
from driftwell.assembly.newcomers import source_rates
from driftwell.assembly.pace import chosen_pace
from driftwell.coulomb.bunch_frames import BunchFrames, chosen_frames
from driftwell.coulomb.summation import Summation
from driftwell.fields.form import Role
from driftwell.fields.table import field_tables
from driftwell.forms.body import Body
from driftwell.images.image_sum import Images
from driftwell.particles.species import bodies as known_bodies
from driftwell.particles.state import Particles, joined
from driftwell.particles.unborn import Unborn
from driftwell.processes.table import Acting, acting
from driftwell.record.header import Header, trace_name
from driftwell.record.rows import tracked_ids
from driftwell.scenario.conductors import Conductors
from driftwell.scenario.model import Scenario
from driftwell.scenario.read import LoadedScenario
from driftwell.scenario.room import Extent, Warn, extent_of, refuse_beyond_memory
from driftwell.solved.acting import ActingField, acting_field, field_is_kept
from driftwell.solved.edges import Edges
from driftwell.stepping.schedule import (
    RECORD,
    SNAPSHOT,
    TRACE,
    Schedule,
)
from driftwell.stepping.step_choice import (
    Rate,
    StepChoice,
)
from driftwell.walls.form import WallForm
from driftwell.walls.table import surface_table

if TYPE_CHECKING:
    from driftwell.stepping.loop import TimeLoop


@dataclass(frozen=True, slots=True)
class Assembly:
    """What a run is made of, at time zero.

    species : names in the order of ``particles.species``
    clouds : facts in the order of ``particles.cloud``: clouds, then sources
    requests : the coordinates to be traced, each once
    motion : the fastest in the fields that a step must follow; of rate 0 where there is none
    extent : how much of everything it is
    conductors : the electrodes as surfaces
    edges : where fields end that are known in a region only
    acting : the electrodes' solved field; None without electrodes
    images : the conductors that answer to the charges; None where none does
    closest : m from them within which the images' force stops growing; 0 where it does not
    unborn : the charges that sources bear; None without sources
    frames : in which frames the charges are summed; None: in the laboratory, and unwatched
    """

    scenario: Scenario
    bodies: dict[str, Body]
    species: tuple[str, ...]
    particles: Particles
    clouds: tuple[CloudFacts, ...]
    requests: tuple[TraceRequest, ...]
    choice: StepChoice
    motion: Rate
    schedule: Schedule
    extent: Extent
    conductors: Conductors
    edges: tuple[Edges, ...] = ()
    acting: ActingField | None = None
    images: Images | None = None
    closest: float = 0.0
    unborn: Unborn | None = None
    frames: BunchFrames | None = None

    @property
    def everyone(self) -> Particles:
        """The charges at the start and all that will be born, as they are born."""
        if self.unborn is None:
            return self.particles
        return joined([self.particles, self.unborn.particles])

    @property
    def walls(self) -> tuple[WallForm, ...]:
        """The scenario's walls, then the edges of fields."""
        return (*self.scenario.wall, *(wall for each in self.edges for wall in each.walls()))

    @property
    def takers(self) -> tuple[str, ...]:
        """Names of the processes that take charges."""
        return tuple(each.name for each in self.scenario.process if each.takes_charges())

    @property
    def tracked(self) -> NDArray[np.int64]:
        """Ids of the charges whose trajectories are kept."""
        return tracked_ids(len(self.everyone), self.scenario.record.tracks)

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
            motion=self.motion.name,
            motion_rate=self.motion.rate,
            softening=scenario.coulomb.softening,
            coulomb_method=summation.method,
            coulomb_because="; ".join(filter(None, (summation.because, self.frame_remark()))),
            coulomb_accuracy=scenario.coulomb.accuracy,
            field_error=0.0 if self.acting is None else self.acting.solved.error,
            field_digest="" if self.acting is None else self.acting.solved.digest,
            images="" if scenario.images is None else scenario.images.words(),
            images_closest=self.closest,
            clouds=self.clouds,
            species=self.species,
            walls=(*(wall.name for wall in self.walls), *self.conductors.names, *self.takers),
            processes=tuple(process.name for process in scenario.process),
            cell_axis="" if scenario.cell is None else scenario.cell.axis,
            cell_length=0.0 if scenario.cell is None else scenario.cell.length,
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
        from driftwell.stepping.loop import TimeLoop
        from driftwell.stepping.motion import Fields
        from driftwell.stepping.surroundings import Surroundings

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
            [traced(request, self.clouds) for request in self.requests],
            threads,
            state,
            Surroundings(
                self.images,
                self.conductors.table,
                self.unborn,
                self.frames,
                self.scenario.cell,
                self.processes(),
            ),
        )

    def processes(self) -> Acting | None:
        """What else acts on the charges; None where nothing does."""
        scenario = self.scenario
        if not scenario.process:
            return None
        first = len(self.walls) + len(scenario.detector) + len(self.conductors.names)
        clouds = [(cloud.name, self.bodies[cloud.species]) for cloud in self.clouds]
        return acting(scenario.process, clouds, scenario.seed, first)

    def frame_remark(self) -> str:
        """What is to be said of the frames the charges are summed in; empty: nothing."""
        return "" if self.frames is None else self.frames.because


def assembled(
    loaded: LoadedScenario,
    warn: Warn | None = None,
    told: Warn | None = None,
    *,
    solve: bool = True,
) -> Assembly:
    """Put a scenario together; the field of its electrodes is solved where it is not kept.

    warn : where given, it is told that the run would not fit in memory, and nothing is refused
    told : where given, it is told how the electrodes' field comes about
    solve : False for parts that are counted, not run: no field is solved that is not kept, and
        no conductor's images are made ready

    Raises
    ------
    ScenarioError
        The charges cannot be placed as the scenario says, or the run would not fit in memory.
    """
    scenario = loaded.scenario
    bodies = known_bodies(scenario.species)
    kinds = [cloud.species for cloud in scenario.cloud]
    species = tuple(dict.fromkeys([*kinds, *(source.species for source in scenario.source)]))
    charges = scenario.charges(loaded.folder)
    warned = refuse_beyond_memory(extent_of(scenario, charges), warn)
    particles, clouds = loaded_particles(loaded, bodies, species)
    moved = put_in_cell(scenario.cell, particles)
    if moved is not None and told is not None:
        told(moved)
    conductors = Conductors.of(scenario, loaded.folder)
    unborn, sources = loaded_unborn(loaded, bodies, species, conductors, len(particles))
    clouds += sources
    everyone = particles if unborn is None else joined([particles, unborn.particles])
    check_births(scenario, everyone, conductors)
    check_sides(scenario, everyone)  # before anything is solved
    check_given(scenario, everyone)
    acting = None
    if solve or field_is_kept(scenario, loaded.folder):
        acting = acting_field(scenario, loaded.folder, told)
    edges = tuple(edges_in(scenario, acting))
    check_within(scenario, everyone, edges)
    requests = all_traces(scenario)
    frames = _frames(scenario, particles)
    emitting = [
        (
            source,
            conductors.own(source.emitter.electrode_named()),
            everyone.kept(everyone.cloud == facts.index),
        )
        for source, facts in zip(scenario.source, sources, strict=True)
    ]
    setting, softening = scenario.setting(loaded.folder), scenario.coulomb.softening
    newcomers = source_rates(emitting, setting, softening)
    choice, every, motion = chosen_pace(
        scenario, bodies, species, particles, everyone, newcomers, requests, acting, frames
    )
    samples = scenario.duration / every if requests else 0.0
    born = 0 if unborn is None else len(unborn)
    extent = extent_of(scenario, charges, int(samples), len(requests), born)
    bordering = sum(len(each.walls()) for each in edges)
    extent = replace(extent, surfaces=extent.surfaces + bordering)
    if not warned:
        refuse_beyond_memory(extent, warn)
    plan = all_marks(scenario, choice.step, bool(requests), every, acting)
    asked = asked_of_images(scenario, everyone, choice)
    return Assembly(
        scenario,
        bodies,
        species,
        particles,
        tuple(clouds),
        tuple(requests),
        choice,
        motion,
        plan,
        _counted(extent, plan),
        conductors,
        edges,
        acting,
        answering(scenario, conductors, asked) if solve else None,
        closest_to(scenario.images, asked),
        unborn,
        frames,
    )


def _counted(extent: Extent, plan: Schedule) -> Extent:
    """The extent with the records, samples and snapshots that the schedule really has."""
    records, samples, snapshots = (
        int(np.count_nonzero(plan.flags & flag)) for flag in (RECORD, TRACE, SNAPSHOT)
    )
    return replace(extent, records=records, samples=samples, snapshots=snapshots)


def _frames(scenario: Scenario, particles: Particles) -> BunchFrames:
    """The rest frames that the charges are summed in."""
    return chosen_frames(
        scenario.coulomb,
        [*(cloud.name for cloud in scenario.cloud), *(each.name for each in scenario.source)],
        particles.cloud,
        particles.velocity,
        particles.mass * particles.weight,
        unfit=bool(scenario.images or scenario.cell or scenario.source),
    )
