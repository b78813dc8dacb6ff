"""Mobility of a cloud of ions in a gas: drift velocity over field.

    K  = v_d / |E|                                                                            (1)
    K0 = K (p / 101325 Pa) (273.15 K / T)                                                     (2)

v_d is the mean over the charges of what each moved along the axis between two times, over their
distance in time, positive where it goes the way the field pushes. K0 is the mobility at the
standard number density. Only charges that are there at both times count: where many are lost on
the way, those that were fast or slow are picked out, and the note says how many.

The error is that of a mean over charges that move independently: diffusion is in it.

References
----------
E. A. Mason, E. W. McDaniel, Transport Properties of Ions in Gases (1988), sec. 1.1 and 2.1 (from
memory).
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import weight_in_words
from driftwell.answers.evidence import Evidence, Needs
from driftwell.answers.form import AXES, Axis, QuestionForm, cloud_named, reached
from driftwell.answers.kinds.passage_question import in_order, window_in_words
from driftwell.answers.sampling import mean_error
from driftwell.constants import BOLTZMANN
from driftwell.errors import AnswerError
from driftwell.forms import (
    ElectricField,
    NonNegative,
    NonZero,
    Positive,
    Pressure,
    Temperature,
    Time,
    TrueOrFalse,
    checked,
    key,
    refuse,
)
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

STANDARD_DENSITY = 101325.0 / (BOLTZMANN * 273.15)
"""1/m^3, of a gas at 273.15 K and 101325 Pa."""
TOWNSEND = 1e-21
"""V m^2."""


class Mobility(QuestionForm):
    """Drift velocity over field."""

    unit: ClassVar[str] = "m^2/(V s)"
    ask: Literal["mobility"] = key("mobility: drift velocity over electric field")
    axis: Axis = key("axis of the field", default="z")
    field: NonZero[ElectricField] = key(
        "electric field along the axis, with its sign", example="100 V/m"
    )
    over: tuple[NonNegative[Time], NonNegative[Time]] = key(
        "the stretch of time between whose ends the drift is taken", example=["1 ms", "5 ms"]
    )
    reduced: TrueOrFalse = key(
        "true: K0, at the standard density of the gas; false: K", default=False
    )
    pressure: Positive[Pressure] | None = key(
        "pressure of the gas, for K0", default=None, example="100 Pa"
    )
    temperature: Positive[Temperature] | None = key(
        "temperature of the gas, for K0", default=None, example="300 K"
    )

    @checked
    def _gas_known(self) -> Self:
        in_order(self.over)
        if self.reduced and (self.pressure is None or self.temperature is None):
            raise refuse("reduced = true needs `pressure` and `temperature` of the gas")
        return self

    def needs(self, duration: float) -> Needs:
        return Needs(snapshots=self.over)

    def times(self) -> dict[str, float]:
        return {"over": self.over[1]}

    def answer(self, evidence: Evidence) -> Answer:
        cloud = cloud_named(evidence, self.of)
        if cloud.charge == 0.0:
            raise AnswerError("particles without charge have no mobility")
        moved, gone = self._moved(evidence, cloud.index)
        if moved.size == 0:
            raise AnswerError(f'no charge of "{self.of}" is left {window_in_words(self.over)}')
        way = np.sign(cloud.charge) / (self.over[1] - self.over[0]) / self.field
        value, spread = float(moved.mean() * way), mean_error(moved)
        error = None if spread is None else spread * abs(float(way))
        notes = [f"{moved.size} charges{weight_in_words(cloud)}"]
        if gone:
            notes.append(f"{gone} more were lost on the way")
        notes.append(f"drift {spelled(value * abs(self.field), 'm/s', 4)}")
        if self.pressure is not None and self.temperature is not None:
            density = self.pressure / (BOLTZMANN * self.temperature)
            other = value * density / STANDARD_DENSITY
            notes.append(f"E/n {abs(self.field) / density / TOWNSEND:.4g} Td")
            notes.append(
                f"K {value:.4g} m^2/(V s)" if self.reduced else f"K0 {other:.4g} m^2/(V s)"
            )
            if self.reduced:
                error = None if error is None else error * density / STANDARD_DENSITY
                value = other
        if error is None:
            notes.append("too few charges to tell an error from")
        return self.answered(value, error, "; ".join(notes))

    def _moved(self, evidence: Evidence, cloud: int) -> tuple[Floats, int]:
        """What each charge moved along the axis, m, and how many were lost between the times."""
        reached(self.over[1], evidence)
        first, last = (evidence.snapshot(time) for time in self.over)
        axis = AXES.index(self.axis)
        before, after = first.id[first.cloud == cloud], last.id[last.cloud == cloud]
        _, a, b = np.intersect1d(before, after, assume_unique=True, return_indices=True)
        start = first.position[first.cloud == cloud][a, axis]
        end = last.position[last.cloud == cloud][b, axis]
        return end - start, int(before.size - a.size)

    def words(self) -> str:
        which = "reduced mobility" if self.reduced else "mobility"
        return (
            f'{which} of cloud "{self.of}" along {self.axis} in {spelled(self.field, "V/m")}, '
            f"{window_in_words(self.over)}"
        )
