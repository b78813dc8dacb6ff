"""All kinds of questions a scenario may ask, told apart by their key `ask`.

A new kind is one new file in :mod:`driftwell.answers.kinds` and one name here.
"""

from __future__ import annotations

from driftwell.answers.form import QuestionForm
from driftwell.answers.kinds.arrival_energy import ArrivalEnergy
from driftwell.answers.kinds.arrival_time import ArrivalTime
from driftwell.answers.kinds.beam_envelope import BeamEnvelope
from driftwell.answers.kinds.brightness import Brightness
from driftwell.answers.kinds.centre_and_size import Centre, RmsSize
from driftwell.answers.kinds.current import Current
from driftwell.answers.kinds.emittance import Emittance
from driftwell.answers.kinds.envelope_tune import EnvelopeTune
from driftwell.answers.kinds.force import Force
from driftwell.answers.kinds.fractions import FractionLeft, FractionThrough
from driftwell.answers.kinds.frequency import Frequency
from driftwell.answers.kinds.heating_rate import HeatingRate
from driftwell.answers.kinds.kinetic_energy import KineticEnergy, KineticEnergySpread
from driftwell.answers.kinds.lifetime import Lifetime
from driftwell.answers.kinds.mass_resolving_power import LineResolvingPower, MassResolvingPower
from driftwell.answers.kinds.mobility import Mobility
from driftwell.answers.kinds.nearest_neighbour import NearestNeighbour
from driftwell.answers.kinds.peak_density import PeakDensity
from driftwell.answers.kinds.perveance import GeneralisedPerveance, Perveance
from driftwell.answers.kinds.plasma import CouplingParameter, DebyeLength, PlasmaFrequency
from driftwell.answers.kinds.rotation_frequency import RotationFrequency
from driftwell.answers.kinds.spectrum_lines import FrequencyShift, SpectrumPeak
from driftwell.answers.kinds.spot_size import SpotSize
from driftwell.answers.kinds.temperature import Temperature
from driftwell.answers.kinds.transmission import Transmission
from driftwell.answers.kinds.tune import Tune, TuneDepression

QUESTION_KINDS: tuple[type[QuestionForm], ...] = (
    FractionLeft,
    FractionThrough,
    Transmission,
    Lifetime,
    Centre,
    RmsSize,
    Temperature,
    HeatingRate,
    KineticEnergy,
    KineticEnergySpread,
    Emittance,
    BeamEnvelope,
    EnvelopeTune,
    ArrivalTime,
    ArrivalEnergy,
    SpotSize,
    Current,
    Perveance,
    GeneralisedPerveance,
    Brightness,
    MassResolvingPower,
    Frequency,
    SpectrumPeak,
    FrequencyShift,
    LineResolvingPower,
    Tune,
    TuneDepression,
    RotationFrequency,
    Mobility,
    PeakDensity,
    PlasmaFrequency,
    DebyeLength,
    CouplingParameter,
    NearestNeighbour,
    Force,
)
