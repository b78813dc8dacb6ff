"""Mass resolving power m / dm of a peak of arrival times, or of a line in a spectrum.

    of a peak in time            t / (2 dt),  since t goes with sqrt(m)                       (1)
    of a line, f ~ 1/m           f / df       (cyclotron motion)                              (2)
    of a line, f ~ 1/sqrt(m)     f / (2 df)   (harmonic motion in an electric well)           (3)

dt is the full width at half maximum of the times at which charges first pass a detector, t their
mean after `since`, the start of the flight. The error joins the jackknife of the width with that
of the mean.

df is the full width at half maximum of the line in the magnitude of the spectrum, no window laid
over the trace: for a lasting sine traced for a time T it is 1.2067/T, and less where the motion
lasts longer, not where samples lie closer. It tells which masses would show as two lines, not how
well one mass is known: for that see `frequency`, whose error is far smaller. One trace has one
width, so it has no sampling error.

References
----------
W. C. Wiley, I. H. McLaren, Rev. Sci. Instrum. 26 (1955) 1150 (eq. 1).
A. G. Marshall, C. L. Hendrickson, G. S. Jackson, Mass Spectrom. Rev. 17 (1998) 1 (eq. 2).
A. Makarov, Anal. Chem. 72 (2000) 1156 (eq. 3). From memory.
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence
from driftwell.answers.kinds.arrival_time import LEAST
from driftwell.answers.kinds.frequency import TracedQuestion
from driftwell.answers.kinds.passage_question import PassageQuestion
from driftwell.answers.passages import passages_in_words
from driftwell.answers.peak_width import full_width
from driftwell.answers.sampling import mean_error
from driftwell.answers.sinusoid import chosen_line
from driftwell.answers.tracing import whose
from driftwell.errors import AnswerError
from driftwell.forms import Frequency as FrequencyQuantity
from driftwell.forms import NonNegative, Positive, Time, checked, key, refuse
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

_POINTS = 400
"""Places a bin apart or less on either side of a line where its magnitude is worked out."""
_REACH = 40.0
"""Bins on either side within which its half maximum must lie."""
_CLOSER = 30
"""Halvings of a stretch that brackets a half maximum."""


class MassResolvingPower(PassageQuestion):
    """Mass resolving power of a peak of arrival times."""

    unit: ClassVar[str] = "1"
    ask: Literal["mass-resolving-power"] = key("m/dm of a peak of arrival times at a detector")
    since: NonNegative[Time] = key("when the flight began", default=0.0, example="1 us")

    @checked
    def _flight_first(self) -> Self:
        if self.over is not None and self.over[1] <= self.since:
            raise refuse("`over` must end later than the flight begins, at `since`")
        return self

    def answer(self, evidence: Evidence) -> Answer:
        passed = self.first_passages(evidence, LEAST["fwhm"])
        flight = float(passed.time.mean()) - self.since
        if flight <= 0.0:
            raise AnswerError("the charges passed before the flight began, at `since`")
        width, error = full_width(passed.time)
        if width <= 0.0:
            raise AnswerError("the peak has no width")
        value = flight / (2.0 * width)
        note = (
            f"t / (2 dt) with t = {spelled(flight, 's', 5)} and dt = {spelled(width, 's', 3)}, "
            "full width at half maximum; "
            f"{passages_in_words(passed, self.clouds(evidence), self.over)}"
        )
        if error is not None:
            error = value * math.hypot(error / width, (mean_error(passed.time) or 0.0) / flight)
        return self.answered(value, error, note)

    def words(self) -> str:
        since = f", flight from {spelled(self.since, 's')} on" if self.since else ""
        return (
            f'mass resolving power of the arrival times of {self.whose()} at detector "{self.of}"'
            f"{self.when()}{since}"
        )


class LineResolvingPower(TracedQuestion):
    """Mass resolving power of a line in the spectrum of a traced motion."""

    unit: ClassVar[str] = "1"
    ask: Literal["line-resolving-power"] = key("m/dm of a line in the spectrum of a motion")
    near: Positive[FrequencyQuantity] | None = key(
        "look for the strongest line within a tenth of this; left out: the strongest of all",
        default=None,
        example="80 kHz",
    )
    motion: Literal["harmonic", "cyclotron"] = key(
        "harmonic: f goes with 1/sqrt(m), f/(2 df); cyclotron: f goes with 1/m, f/df",
        default="harmonic",
    )

    def answer(self, evidence: Evidence) -> Answer:
        traced, lines = self.lines(evidence)
        line = chosen_line(lines, self.near, traced.length)
        width = line_width(traced.time, traced.value, line.frequency)
        times = 2.0 if self.motion == "harmonic" else 1.0
        formula = "f / (2 df)" if times == 2.0 else "f / df"
        note = (
            f"{formula} with f = {spelled(line.frequency, 'Hz', 6)} and df = "
            f"{spelled(width, 'Hz', 3)}, full width at half maximum; {traced.words()}; one trace "
            "has one width: no sampling error is known"
        )
        return self.answered(line.frequency / (times * width), None, note)

    def words(self) -> str:
        near = "" if self.near is None else f" near {spelled(self.near, 'Hz')}"
        return (
            f"mass resolving power of the line of {whose(self.request())} along {self.axis}{near}, "
            f"{self.motion} motion"
        )


def line_width(time: Floats, value: Floats, frequency: float) -> float:
    """Full width at half maximum of a line in the magnitude of the spectrum, Hz.

    Raises AnswerError where the magnitude does not fall to half of it on either side.
    """
    moved = value - value.mean()
    begin = time - time[0]
    bin_width = 1.0 / (float(begin[-1]) * time.size / (time.size - 1))

    def magnitude(place: float) -> float:
        angle = 2.0 * math.pi * (frequency + place * bin_width) * begin
        return math.hypot(float(np.cos(angle) @ moved), float(np.sin(angle) @ moved))

    top = magnitude(0.0)
    total = 0.0
    for side in (-1.0, 1.0):
        inside, outside = 0.0, _REACH / _POINTS
        while magnitude(side * outside) > 0.5 * top:
            inside, outside = outside, outside + _REACH / _POINTS
            if outside > _REACH:
                raise AnswerError(
                    "the line does not fall to half of its height within "
                    f"{spelled(_REACH * bin_width, 'Hz', 3)}: too weak or too broad"
                )
        for _ in range(_CLOSER):
            middle = 0.5 * (inside + outside)
            if magnitude(side * middle) > 0.5 * top:
                inside = middle
            else:
                outside = middle
        total += 0.5 * (inside + outside)
    return total * bin_width
