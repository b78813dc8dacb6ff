"""Frequency of an oscillation: of a cloud's centre, or of one charge, along one axis.

The coordinate is traced finely while the run goes on; :mod:`driftwell.answers.sinusoid` finds its
lines. The error is that of reading the frequency off the trace. What the length of the step does
to the motion itself is not in it: kick-drift-kick with n steps in a period is fast by the part
(2 pi / n)^2 / 24.

References
----------
C. K. Birdsall, A. B. Langdon, Plasma Physics via Computer Simulation (1985), ch. 4 (the phase error
of leap-frog; from memory).
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

from driftwell.answers.answer import Answer
from driftwell.answers.evidence import Evidence, Needs, TraceRequest
from driftwell.answers.form import AXES, Axis, QuestionForm, References, cloud_named
from driftwell.answers.kinds.force import charge_id
from driftwell.answers.sinusoid import Line, chosen_line, lines_in, other_line
from driftwell.answers.tracing import Followed, followed, whose
from driftwell.forms import Count, NonNegative, Positive, Time, checked, key, refuse
from driftwell.forms import Frequency as FrequencyQuantity
from driftwell.forms.spelling import spelled


class TracedQuestion(QuestionForm):
    """Base of questions about lines in the motion of a cloud's centre or of one charge."""

    axis: Axis = key("the axis")
    charge: NonNegative[Count] | None = key(
        "which charge of the cloud, counted from 0; left out: the cloud's centre",
        default=None,
        example=0,
    )
    every: Positive[Time] | None = key(
        "time between samples; left out: at least 20 in the fastest period",
        default=None,
        example="0.1 us",
    )

    def needs(self, duration: float) -> Needs:
        return Needs(traces=(self.request(),))

    def refers_to(self) -> References:
        charges = () if self.charge is None else ((self.of, self.charge),)
        return References(clouds=(self.of,), charges=charges)

    def request(self) -> TraceRequest:
        """What is traced."""
        return TraceRequest(self.of, self.charge, AXES.index(self.axis), self.every)

    def lines(self, evidence: Evidence) -> tuple[Followed, list[Line]]:
        """The motion, and the lines in it, the strongest first."""
        cloud_named(evidence, self.of)
        if self.charge is not None:
            charge_id(evidence, self.of, self.charge)
        traced = followed(evidence, self.request())
        return traced, lines_in(traced.time, traced.value)


class Frequency(TracedQuestion):
    """Frequency of a line in the motion of a cloud's centre or of one charge."""

    unit: ClassVar[str] = "Hz"
    ask: Literal["frequency"] = key("frequency of an oscillation")
    near: Positive[FrequencyQuantity] | None = key(
        "look for the strongest line within a tenth of this; left out: the strongest of all",
        default=None,
        example="80 kHz",
    )

    @checked
    def _sampled_finely(self) -> Self:
        if self.every is not None and self.near is not None and self.near * self.every >= 0.5:
            raise refuse("`every` must be shorter than half a period of `near`")
        return self

    def answer(self, evidence: Evidence) -> Answer:
        traced, lines = self.lines(evidence)
        line = chosen_line(lines, self.near, traced.length)
        note = f"{traced.words()}; amplitude {spelled(line.amplitude, 'm', 3)}"
        note += other_line(lines, line)
        return self.answered(line.frequency, line.error, note)

    def words(self) -> str:
        near = "" if self.near is None else f" near {spelled(self.near, 'Hz')}"
        return f"frequency of {whose(self.request())} along {self.axis}{near}"
