"""The step of a run: how fast charges move in its fields and among each other."""

from __future__ import annotations

import math
from collections.abc import Mapping, Sequence
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import TraceRequest
from driftwell.coulomb.bunch_frames import (
    BunchFrames,
    moving,
    places_within,
    velocities_within,
)
from driftwell.errors import ScenarioError
from driftwell.fields.form import FieldForm
from driftwell.forms import spelled
from driftwell.forms.body import Body
from driftwell.particles.state import Particles
from driftwell.record.form import DEFAULT_RECORDS
from driftwell.scenario.cross_checks import MOST_STEPS
from driftwell.scenario.model import Scenario
from driftwell.solved.acting import ActingField
from driftwell.stepping.schedule import (
    MOST_MARKS,
)
from driftwell.stepping.schemes import MIDWAY
from driftwell.stepping.step_choice import (
    Rate,
    StepChoice,
    chosen_step,
    closest_pair_rates,
    plasma_rates,
)

Floats = NDArray[np.float64]

SAMPLES_PER_PERIOD = 20.0
LEAST_SAMPLES = 100.0
"""Of a run, where nothing known is fast: what is seen may come from elsewhere."""
_PLACES = 2000
"""Charges of a kind at whose places fields are looked at, at the most."""


def chosen_pace(
    scenario: Scenario,
    bodies: dict[str, Body],
    names: Sequence[str],
    particles: Particles,
    everyone: Particles,
    newcomers: Sequence[Rate],
    requests: Sequence[TraceRequest],
    acting: ActingField | None,
    frames: BunchFrames | None = None,
) -> tuple[StepChoice, float, Rate]:
    """The step, the time between samples of the traces, and the fastest motion in the fields.

    everyone : with those to be born, as they are born; newcomers : how fast these will move others
    """
    stepping = scenario.stepping
    held = [_some_places(particles, number) for number in range(len(names))]
    rates = [
        Rate(f'{name} of field "{field.name}" on {species}', value)
        for field in scenario.field
        for species, places in zip(names, held, strict=True)
        for name, value in _rates_of(field, bodies[species], bodies, places).items()
    ]
    if acting is not None:
        rates += _rates_in(acting, bodies, names, everyone, held)
    motion = _to_be_followed(rates, stepping.scheme)
    every = min((request.every for request in requests if request.every), default=math.inf)
    if any(request.every is None for request in requests):
        every = min(every, _between_samples(scenario, rates, particles))
    if stepping.step != "auto":
        choice = StepChoice(float(stepping.step), "the scenario says so")
    else:
        if scenario.coulomb.method != "off":
            rates += _own_rates(particles, scenario.coulomb.softening, frames)
            rates += newcomers
        mark = min(every, scenario.record.every or scenario.duration / DEFAULT_RECORDS)
        choice = chosen_step(rates, stepping.steps_per_period, scenario.duration, mark)
    _refuse_too_many(scenario.duration, choice, every)
    return choice, every, motion


def _between_samples(scenario: Scenario, rates: Sequence[Rate], particles: Particles) -> float:
    """s between samples that show the fastest motion: in the fields, or that of the clouds."""
    found = list(rates)
    if scenario.coulomb.method != "off":
        found += plasma_rates(particles)
    fastest = max((rate.rate for rate in found), default=0.0)
    period = 2.0 * math.pi / fastest if fastest > 0.0 else scenario.duration / 500.0
    return min(period / SAMPLES_PER_PERIOD, scenario.duration / LEAST_SAMPLES)


def _some_places(particles: Particles, species: int) -> Floats:
    """Places (3, n), m, where charges of a kind are at the start."""
    own = np.flatnonzero(particles.species == species)
    return particles.position[:, own[:: 1 + len(own) // _PLACES]]


def _to_be_followed(rates: Sequence[Rate], scheme: str) -> Rate:
    """The fastest motion in the fields, save gyration where the scheme follows it at any step."""
    exact = scheme == MIDWAY
    followed = [rate for rate in rates if not (exact and rate.name.startswith("cyclotron"))]
    return max(followed, key=lambda rate: rate.rate, default=Rate("", 0.0))


def _rates_of(
    field: FieldForm, body: Body, bodies: dict[str, Body], places: Floats
) -> dict[str, float]:
    """How fast a body moves in a field, rad/s, by what it does: usually, or about its places."""
    try:
        field.packed(bodies)
        usual, there = dict(field.rates(body, bodies)), field.rates_at(body, places)
        return {name: max(usual.get(name, 0.0), there.get(name, 0.0)) for name in usual | there}
    except ArithmeticError as fault:
        raise ScenarioError(
            f'[[field]] "{field.name}": its numbers, or the motion of {body.name} in it, are too '
            "large or too small to compute with; check its strength and its sizes."
        ) from fault


def _own_rates(particles: Particles, softening: float, frames: BunchFrames | None) -> list[Rate]:
    """How fast charges move among each other: in a bunch's frame, whose time goes slower here."""
    if frames is None or frames.numbers is None:
        return [*plasma_rates(particles), *closest_pair_rates(particles, softening)]
    own, rates = frames.numbers[particles.cloud], []
    for number in range(frames.count):
        seen = particles.kept(own == number)
        if len(seen) == 0:
            continue
        frame = moving(seen.velocity, seen.mass * seen.weight)
        seen.position = places_within(seen.position, frame.proper)
        seen.velocity = velocities_within(seen.velocity, frame.proper)
        rates += [
            replace(rate, rate=rate.rate / frame.lorentz)
            for rate in (*plasma_rates(seen), *closest_pair_rates(seen, softening))
        ]
    if frames.count > 1:  # charges of different bunches may meet
        rates += closest_pair_rates(particles, softening)
    return rates


def _rates_in(
    acting: ActingField,
    bodies: Mapping[str, Body],
    names: Sequence[str],
    particles: Particles,
    held: Sequence[Floats],
) -> list[Rate]:
    """How fast charges move in the electrodes' field; held : where they are at the start."""
    speed = np.linalg.norm(particles.velocity, axis=0)
    return [
        Rate(f"{name} of {species} in the electrodes' field", value)
        for number, species in enumerate(names)
        for name, value in acting.rates(
            bodies[species],
            float(speed[particles.species == number].max(initial=0.0)),
            held[number],
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
