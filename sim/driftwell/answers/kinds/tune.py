"""Tune of charges: oscillations within a period of the focusing, and its depression by charge.

    tune         nu = mean of f T over single charges,  T = L / v where a length is given      (1)
    depression   nu / nu_0 = mean of f over single charges / f_0                               (2)

f is the frequency of the strongest line in a charge's own traced motion
(:mod:`driftwell.answers.sinusoid`), v that charge's mean velocity along the beam, and f_0 the
frequency without the other charges: from the same scenario with `--set coulomb.method=off`, or by
theory. sigma = 2 pi nu is the phase advance in a period. In a beam nu/nu_0 = f/f_0, since all are
taken along the same flight. The charges followed are the first of the cloud, which is drawn in no
order; of charges laid out by hand, the first in the list.

The error is that of the mean over the charges: each has its own tune where the charge around it is
not uniform. With one charge followed it is that of reading its frequency.

References
----------
M. Reiser, Theory and Design of Charged Particle Beams (1994), sec. 4.3 and 4.4 (tune depression,
phase advance; from memory).
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence, Needs, TraceRequest
from driftwell.answers.form import AXES, Axis, QuestionForm, References, cloud_named
from driftwell.answers.sampling import few_independent
from driftwell.answers.sinusoid import chosen_line, lines_in
from driftwell.answers.tracing import followed
from driftwell.errors import AnswerError
from driftwell.forms import Count, Length, Positive, Time, checked, key, refuse
from driftwell.forms import Frequency as FrequencyQuantity
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class _Found:
    """Frequencies, Hz, of the charges followed, their errors, and velocities along the beam."""

    number: tuple[int, ...]
    frequency: Floats
    error: Floats
    without: int
    why: str


class _TuneQuestion(QuestionForm):
    """What tune and depression share: which charges are followed, and their frequencies."""

    axis: Axis = key("axis of the oscillation")
    charges: Positive[Count] = key(
        "how many single charges to follow: the first of the cloud", default=8
    )
    near: Positive[FrequencyQuantity] | None = key(
        "look for the strongest line within a tenth of this; left out: the strongest of all",
        default=None,
        example="80 kHz",
    )
    every: Positive[Time] | None = key(
        "time between samples; left out: at least 20 in the fastest period",
        default=None,
        example="0.1 us",
    )

    def needs(self, duration: float) -> Needs:
        return Needs(traces=self.requests(self.axis))

    def refers_to(self) -> References:
        return References(
            clouds=(self.of,), charges=((self.of, self.charges - 1),), charge_key="charges"
        )

    def requests(self, axis: str) -> tuple[TraceRequest, ...]:
        """What to trace of every charge followed, along an axis."""
        return tuple(
            TraceRequest(self.of, number, AXES.index(axis), self.every)
            for number in range(self.charges)
        )

    def found(self, evidence: Evidence) -> _Found:
        """The frequencies. Raises AnswerError where none was found."""
        cloud_named(evidence, self.of)
        numbers, frequencies, errors, why = [], [], [], ""
        for request in self.requests(self.axis):
            try:
                traced = followed(evidence, request)
                line = chosen_line(lines_in(traced.time, traced.value), self.near, traced.length)
            except AnswerError as reason:
                why = why or str(reason)
                continue
            numbers.append(request.charge or 0)
            frequencies.append(line.frequency)
            errors.append(line.error)
        if not numbers:
            raise AnswerError(why)
        return _Found(
            tuple(numbers),
            np.array(frequencies),
            np.array(errors),
            self.charges - len(numbers),
            why,
        )

    def averaged(self, found: _Found, factor: Floats) -> Answer:
        """The answer: mean of frequencies times `factor`, (n,), over the charges."""
        values = found.frequency * factor
        count = values.size
        by_reading = math.sqrt(float(np.mean((found.error * factor) ** 2)) / count)
        by_charge = 0.0
        if count > 1:
            by_charge = float(values.std(ddof=1)) / math.sqrt(count) * few_independent(count - 1)
        low, high = (spelled(f, "Hz", 5) for f in (found.frequency.min(), found.frequency.max()))
        note = f"mean of {count} charges, {low} to {high}" if count > 1 else f"1 charge at {low}"
        if found.without:
            note += f"; {found.without} without: {found.why}"
        return self.answered(float(values.mean()), max(by_charge, by_reading), note)


class Tune(_TuneQuestion):
    """Oscillations of single charges within a period."""

    unit: ClassVar[str] = "1"
    ask: Literal["tune"] = key("oscillations of single charges within a period of the focusing")
    period: Positive[Time] | None = key(
        "the period, in time; give this or `length`", default=None, example="1 us"
    )
    length: Positive[Length] | None = key(
        "the period, as a length along the beam", default=None, example="0.4 m"
    )
    beam_axis: Axis = key("axis the beam runs along, for `length`", default="z")

    @checked
    def _one_period(self) -> Self:
        one_period(self.period, self.length, self.axis != self.beam_axis)
        return self

    def needs(self, duration: float) -> Needs:
        along = () if self.length is None else self.requests(self.beam_axis)
        return Needs(traces=(*self.requests(self.axis), *along))

    def answer(self, evidence: Evidence) -> Answer:
        found = self.found(evidence)
        if self.period is not None:
            return self.averaged(found, np.full(found.frequency.size, self.period))
        along = self.requests(self.beam_axis)
        speed = np.array([_mean_speed(evidence, along[number]) for number in found.number])
        return self.averaged(found, (self.length or 0.0) / speed)

    def words(self) -> str:
        return (
            f'tune of {self.charges} charges of cloud "{self.of}" along {self.axis}, '
            f"in a period of {period_in_words(self.period, self.length, self.beam_axis)}"
        )


class TuneDepression(_TuneQuestion):
    """Frequency of single charges over what it would be without the others."""

    unit: ClassVar[str] = "1"
    ask: Literal["tune-depression"] = key(
        "frequency of single charges over their frequency without the others"
    )
    without: Positive[FrequencyQuantity] = key(
        "frequency without the other charges", example="80 kHz"
    )

    def answer(self, evidence: Evidence) -> Answer:
        found = self.found(evidence)
        return self.averaged(found, np.full(found.frequency.size, 1.0 / self.without))

    def words(self) -> str:
        return (
            f'tune depression of {self.charges} charges of cloud "{self.of}" along {self.axis}, '
            f"against {spelled(self.without, 'Hz')}"
        )


def one_period(period: float | None, length: float | None, across: bool) -> None:
    """Refuses a period given twice or not at all, or as a length along the oscillation itself.

    across : whether the oscillation is across the beam
    """
    if (period is None) == (length is None):
        raise refuse("needs either `period` or `length`")
    if length is not None and not across:
        raise refuse("`axis` must be across `beam_axis`, not along it")


def period_in_words(period: float | None, length: float | None, beam_axis: str) -> str:
    """``1 us`` or ``0.4 m along z``."""
    if period is not None:
        return spelled(period, "s")
    return f"{spelled(length or 0.0, 'm')} along {beam_axis}"


def _mean_speed(evidence: Evidence, request: TraceRequest) -> float:
    """Mean speed of one charge along the beam, m/s. Raises AnswerError where it stands still."""
    traced = followed(evidence, request)
    span = float(traced.time[-1] - traced.time[0])
    speed = abs(float(traced.value[-1] - traced.value[0])) / span if span > 0.0 else 0.0
    if speed == 0.0:
        raise AnswerError(f"charge {request.charge} does not move along the beam")
    return speed
