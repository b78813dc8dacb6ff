"""Lines in the spectrum of a traced motion: the k-th strongest, and the shift of one by charge.

    shift = f - f_0,  or (f - f_0) / N for each charge                                        (1)

f is the strongest line within a tenth of f_0, or within `reach`; the note tells of a stronger one
elsewhere. f_0 is given: the frequency without the other charges, from the same
scenario with `--set coulomb.method=off`, or by theory. N is the number of real particles that were
there from the start, of all clouds or of the one that `by` names. The error joins that of f with
`reference_error`. The step changes f and f_0 alike: take both with the same step.
"""

from __future__ import annotations

import math
from dataclasses import replace
from typing import ClassVar, Literal

from driftwell.answers.answer import Answer
from driftwell.answers.charges import number_born
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import References, cloud_named
from driftwell.answers.kinds.frequency import TracedQuestion
from driftwell.answers.sinusoid import chosen_line, other_line
from driftwell.answers.tracing import whose
from driftwell.errors import AnswerError
from driftwell.forms import Count, Name, NonNegative, Positive, TrueOrFalse, key
from driftwell.forms import Frequency as FrequencyQuantity
from driftwell.forms.spelling import spelled

_SHOWN = 4


class SpectrumPeak(TracedQuestion):
    """Frequency of the k-th strongest line in a traced motion."""

    unit: ClassVar[str] = "Hz"
    ask: Literal["spectrum-peak"] = key("frequency of the k-th strongest line of a motion")
    rank: Positive[Count] = key("which line, the strongest being 1", default=1, example=2)

    def answer(self, evidence: Evidence) -> Answer:
        traced, lines = self.lines(evidence)
        if self.rank > len(lines):
            raise AnswerError(
                f"{len(lines)} lines stand above the noise: there is no line {self.rank}"
            )
        line = chosen_line([lines[self.rank - 1]], None, traced.length)
        listed = ", ".join(
            f"{spelled(each.frequency, 'Hz', 5)} ({spelled(each.amplitude, 'm', 3)})"
            for each in lines[:_SHOWN]
        )
        note = f"{traced.words()}; lines by strength: {listed}"
        if len(lines) > _SHOWN:
            note += f" and {len(lines) - _SHOWN} more"
        return self.answered(line.frequency, line.error, note)

    def words(self) -> str:
        which = "strongest line" if self.rank == 1 else f"line {self.rank} by strength"
        return f"{which} in the motion of {whose(self.request())} along {self.axis}"


class FrequencyShift(TracedQuestion):
    """How far a frequency lies from what it is without the other charges."""

    unit: ClassVar[str] = "Hz"
    ask: Literal["frequency-shift"] = key(
        "how far a frequency lies from what it is without the other charges"
    )
    reference: Positive[FrequencyQuantity] = key(
        "frequency without the other charges", example="80 kHz"
    )
    reference_error: NonNegative[FrequencyQuantity] = key(
        "error of `reference`, one standard deviation", default=0.0, example="0.1 Hz"
    )
    reach: Positive[FrequencyQuantity] | None = key(
        "the strongest line so far from `reference` at the most is taken; left out: a tenth of it",
        default=None,
        example="20 kHz",
    )
    per_charge: TrueOrFalse = key(
        "true: over the number of real particles there at the start", default=False
    )
    by: Name | None = key(
        "count the particles of this cloud, for `per_charge`; left out: of all clouds",
        default=None,
    )

    def refers_to(self) -> References:
        refers = super().refers_to()
        clouds = refers.clouds if self.by is None else (*refers.clouds, self.by)
        return replace(refers, clouds=clouds)

    def answer(self, evidence: Evidence) -> Answer:
        traced, lines = self.lines(evidence)
        line = chosen_line(lines, self.reference, traced.length, self.reach)
        shift = line.frequency - self.reference
        error = math.hypot(line.error, self.reference_error)
        note = (
            f"{traced.words()}; line at {spelled(line.frequency, 'Hz', 9)}, "
            f"relative shift {shift / self.reference:.4g}{other_line(lines, line)}"
        )
        if not self.per_charge:
            return self.answered(shift, error, note)
        number = self._number(evidence)
        note += f"; for each of {number:.6g} particles"
        return self.answered(shift / number, error / number, note)

    def _number(self, evidence: Evidence) -> float:
        clouds = list(evidence.clouds.values())
        if self.by is not None:
            clouds = [cloud_named(evidence, self.by)]
        number = sum(cloud.weight * number_born(evidence, cloud) for cloud in clouds)
        if number == 0.0:
            raise AnswerError("there are no particles to share the shift")
        return number

    def words(self) -> str:
        each = ""
        if self.per_charge:
            whom = "particle of all clouds" if self.by is None else f'particle of cloud "{self.by}"'
            each = f", for each {whom}"
        return (
            f"shift of the frequency of {whose(self.request())} along {self.axis} from "
            f"{spelled(self.reference, 'Hz')}{each}"
        )
