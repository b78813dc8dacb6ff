"""Heating rate of a cloud: slope of its temperature over a stretch of time.

    T(t) = T_0 + rate t, fitted by least squares to the temperature at every record           (1)

The temperature is that of `temperature`, along one axis or the mean of the three. The error knows
that neighbouring records say almost the same, and that a breathing cloud is cut at some phase
(:func:`driftwell.answers.series.series_slope`). It is that of this one run: which charges were
drawn stays hidden in it, and a heating that gathers speed has no one slope; the note tells how far
the records scatter about the line.
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import weight_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import QuestionForm, cloud_named
from driftwell.answers.kinds.moment_question import records_within
from driftwell.answers.kinds.passage_question import in_order, window_in_words
from driftwell.answers.kinds.temperature import Temperature
from driftwell.answers.series import series_slope
from driftwell.errors import AnswerError
from driftwell.forms import NonNegative, Time, checked, key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

_LEAST_RECORDS = 6


class HeatingRate(QuestionForm):
    """Slope of a cloud's temperature in time."""

    unit: ClassVar[str] = "K/s"
    ask: Literal["heating-rate"] = key("slope of the temperature in time")
    over: tuple[NonNegative[Time], NonNegative[Time]] = key(
        "the stretch of time in which the slope is taken", example=["1 ms", "5 ms"]
    )
    axis: Literal["x", "y", "z", "mean"] = key(
        'the axis, or "mean": the mean of the three', default="mean"
    )

    @checked
    def _ordered(self) -> Self:
        in_order(self.over)
        return self

    def times(self) -> dict[str, float]:
        return {"over": self.over[1]}

    def answer(self, evidence: Evidence) -> Answer:
        cloud = cloud_named(evidence, self.of)
        used, window = records_within(evidence, self.of, self.over, least=2)
        asked = Temperature(name=self.name, ask="temperature", of=self.of, axis=self.axis)
        even = _even(used.time)
        kelvin = asked.of_moments(used, cloud)[:even]
        if even < _LEAST_RECORDS:
            raise AnswerError(
                f"{even} evenly spaced records lie in the window; needs at least {_LEAST_RECORDS}: "
                "shorten `every` in [record]"
            )
        found = series_slope(used.time[:even], kelvin)
        notes = [
            f"line through {even} records {window}",
            f"mean {spelled(float(kelvin.mean()), 'K', 4)}; the records scatter about the line "
            f"by {spelled(found.scatter, 'K', 2)}",
        ]
        if found.error is None:
            notes.append(
                "no error: the temperature strays from the line too slowly against the window "
                f"(worth {found.independent:.2g} independent records)"
            )
        notes.append(weight_in_words(cloud).removeprefix(", "))
        return self.answered(found.slope, found.error, "; ".join(filter(None, notes)))

    def words(self) -> str:
        which = "mean of three axes" if self.axis == "mean" else f"along {self.axis}"
        return (
            f'slope of the temperature of cloud "{self.of}", {which}, {window_in_words(self.over)}'
        )


def _even(time: Floats) -> int:
    """How many records, from the first on, are evenly spaced: the one at the end may not be."""
    if time.size < 3:
        return int(time.size)
    spacing = np.diff(time)
    odd = np.abs(spacing - spacing[0]) > 0.01 * spacing[0]
    return 1 + (int(odd.argmax()) if odd.any() else int(spacing.size))
