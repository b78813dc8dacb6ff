"""All kinds of hand calculations, in the order they are told.

A new kind is one new file in :mod:`driftwell.hand.kinds` and one line here.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.answers.form import QuestionForm
from driftwell.hand.formula import HandKind, HandValue
from driftwell.hand.kinds import (
    beam_envelope,
    brillouin_limit,
    child_langmuir,
    collision_time,
    coulomb_explosion,
    coupling,
    debye_length,
    density,
    doppler_limit,
    gas_loss,
    image_force,
    ion_string,
    larmor,
    mobility,
    nearest_neighbour,
    penning_trap,
    perveance,
    plasma_frequency,
    pseudopotential_depth,
    pseudopotential_limit,
    pulse_spread,
    relaxation,
    rf_trap,
    rigid_rotation,
    static_well,
    time_of_flight,
    universal_curve,
)
from driftwell.hand.scene import Scene

HAND_KINDS: tuple[HandKind, ...] = (
    density.KIND,
    plasma_frequency.KIND,
    debye_length.KIND,
    coupling.KIND,
    nearest_neighbour.KIND,
    coulomb_explosion.KIND,
    rf_trap.KIND,
    pseudopotential_depth.KIND,
    pseudopotential_limit.KIND,
    ion_string.KIND,
    static_well.KIND,
    penning_trap.KIND,
    brillouin_limit.KIND,
    rigid_rotation.KIND,
    larmor.KIND,
    perveance.KIND,
    universal_curve.KIND,
    beam_envelope.KIND,
    pulse_spread.KIND,
    time_of_flight.KIND,
    child_langmuir.KIND,
    collision_time.KIND,
    mobility.KIND,
    relaxation.KIND,
    gas_loss.KIND,
    doppler_limit.KIND,
    image_force.KIND,
)


def hand_values(scene: Scene) -> list[HandValue]:
    """All that can be worked out by hand of a scene; what is no finite number is left out."""
    found: list[HandValue] = []
    with np.errstate(all="ignore"):
        for kind in HAND_KINDS:
            try:
                found += [value for value in kind.values(scene) if math.isfinite(value.value)]
            except ArithmeticError:  # sizes or strengths beyond all measure
                continue
    return found


def hand_answer(question: QuestionForm, scene: Scene) -> HandValue | None:
    """What can be said by hand to a question; None where nothing fits."""
    with np.errstate(all="ignore"):
        for kind in HAND_KINDS:
            try:
                found = kind.answer(question, scene)
            except ArithmeticError:
                continue
            if found is not None and math.isfinite(found.value):
                return found
    return None
