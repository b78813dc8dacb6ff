"""The scenario: every section a file may hold, from what each part declares."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from driftwell.answers.form import QuestionForm
from driftwell.answers.table import QUESTION_KINDS
from driftwell.coulomb.cell import Cell
from driftwell.coulomb.form import Coulomb
from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.fields.form import FieldForm
from driftwell.fields.table import FIELD_KINDS
from driftwell.forms import Count, Form, Name, NonNegative, Positive, Time, Title, key, one_of
from driftwell.images.form import ImagesForm
from driftwell.images.table import IMAGE_KINDS
from driftwell.particles.cloud import Cloud
from driftwell.particles.source import Setting, Source
from driftwell.particles.species import SpeciesForm, bodies
from driftwell.processes.form import ProcessForm
from driftwell.processes.table import PROCESS_KINDS
from driftwell.record.form import Record
from driftwell.stepping.form import Stepping
from driftwell.walls.form import DetectorForm, WallForm
from driftwell.walls.table import DETECTOR_KINDS, WALL_KINDS

if TYPE_CHECKING:
    AnyField = FieldForm
    AnyWall = WallForm
    AnyDetector = DetectorForm
    AnyQuestion = QuestionForm
    AnyImages = ImagesForm
    AnyProcess = ProcessForm
else:
    AnyField = one_of(FIELD_KINDS)
    AnyWall = one_of(WALL_KINDS)
    AnyDetector = one_of(DETECTOR_KINDS)
    AnyQuestion = one_of(QUESTION_KINDS, by="ask")
    AnyImages = one_of(IMAGE_KINDS)
    AnyProcess = one_of(PROCESS_KINDS)


class Scenario(Form):
    """The whole statement of a run: what moves, what pushes and stops it, what is asked of it."""

    title: Title = key("what is simulated, in one line", example="Barium cloud in a rod trap")
    duration: Positive[Time] = key("time the motion is followed, from time zero", example="2 ms")
    seed: NonNegative[Count] = key("number all random draws are made from", default=1, example=7)
    species: dict[Name, SpeciesForm] = key(
        "kinds of particles beside those known by name, each as [species.NAME]", default={}
    )
    cloud: tuple[Cloud, ...] = key("groups of charges present from the start", default=())
    source: tuple[Source, ...] = key(
        "charges born while the run goes on, each at its own time", default=()
    )
    field: tuple[AnyField, ...] = key("what pushes the charges from outside", default=())
    electrodes: Electrodes | None = key(
        "what all electrodes have in common: how they are drawn, how well their field is known",
        default=None,
    )
    electrode: tuple[Electrode, ...] = key("conductors, each with a voltage", default=())
    wall: tuple[AnyWall, ...] = key("surfaces that absorb or reflect charges", default=())
    detector: tuple[AnyDetector, ...] = key(
        "surfaces that record the charges passing them", default=()
    )
    coulomb: Coulomb = key("how the force between the charges is summed", default=Coulomb())
    cell: Cell | None = key(
        "stretch along one axis that repeats without end; left out: everything is there once",
        default=None,
    )
    images: AnyImages | None = key(
        "conductors that answer to the charges between them; left out: none does", default=None
    )
    process: tuple[AnyProcess, ...] = key(
        "what else acts on the charges: gas, drag, laser light, a heat bath", default=()
    )
    stepping: Stepping = key("how time is cut into steps", default=Stepping())
    record: Record = key("what is kept, and how often", default=Record())
    question: tuple[AnyQuestion, ...] = key("what the run is asked", default=())

    def charges(self, folder: Path) -> int:
        """Number of simulated charges, at the start and to be born; files count from `folder`."""
        known, setting = bodies(self.species), self.setting(folder)
        there = sum(cloud.amount(known, folder).count for cloud in self.cloud)
        return there + sum(source.amount(setting).count for source in self.source)

    def setting(self, folder: Path) -> Setting:
        """What sources are seen with; files that are named count from `folder`."""
        return Setting(self.seed, self.duration, bodies(self.species), folder)
