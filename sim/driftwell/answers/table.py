"""All kinds of questions a scenario may ask, told apart by their key `ask`.

A new kind is one new file in :mod:`driftwell.answers.kinds` and one name here.
"""

from __future__ import annotations

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.arrival_time import ArrivalTime
from driftwell.answers.kinds.centre_and_size import Centre, RmsSize
from driftwell.answers.kinds.emittance import Emittance
from driftwell.answers.kinds.force import Force
from driftwell.answers.kinds.fractions import FractionLeft, FractionThrough
from driftwell.answers.kinds.frequency import Frequency
from driftwell.answers.kinds.kinetic_energy import KineticEnergy, KineticEnergySpread
from driftwell.answers.kinds.nearest_neighbour import NearestNeighbour
from driftwell.answers.kinds.peak_density import PeakDensity
from driftwell.answers.kinds.temperature import Temperature

QUESTION_KINDS: tuple[type[QuestionForm], ...] = (
    FractionLeft,
    FractionThrough,
    Centre,
    RmsSize,
    Temperature,
    KineticEnergy,
    KineticEnergySpread,
    Emittance,
    ArrivalTime,
    Frequency,
    PeakDensity,
    NearestNeighbour,
    Force,
)
