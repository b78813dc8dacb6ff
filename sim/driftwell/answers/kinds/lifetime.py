"""Lifetime of a cloud: the time constant of an exponential loss, survivors counted.

    tau = sum over the charges of the time each was watched / number lost                     (1)
    error = tau / sqrt(number lost)                                                            (2)

A charge is watched from its birth, or the start of the window, until it is lost or the window
ends. Eq. 1 is the value of greatest likelihood when every charge may be lost at any time with the
same chance 1/tau; that some outlive the run is in it. Whether the loss is exponential the note
lets one judge: as many losses are expected in the first half of the time watched as in the second.

References
----------
J. D. Kalbfleisch, R. L. Prentice, The Statistical Analysis of Failure Time Data, 2nd ed. (2002),
sec. 3.4 (from memory).
"""

from __future__ import annotations

import math
from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import births_of, weight_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import TIME_TOLERANCE, QuestionForm, cloud_named, reached
from driftwell.answers.kinds.passage_question import in_order, window_in_words
from driftwell.errors import AnswerError
from driftwell.forms import NonNegative, Time, checked, key
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

_SURE = 3.0
"""With no loss seen the lifetime is above the time watched over this, with 95 % confidence."""
_ODD = 3.0
"""Standard deviations by which the halves' losses differ where the loss is not exponential."""


class Lifetime(QuestionForm):
    """Time constant of the exponential loss of a cloud."""

    unit: ClassVar[str] = "s"
    ask: Literal["lifetime"] = key("time constant of an exponential loss, survivors counted")
    over: tuple[NonNegative[Time], NonNegative[Time]] | None = key(
        "count losses in this stretch of time; left out: in the whole run", default=None
    )

    @checked
    def _ordered(self) -> Self:
        if self.over is not None:
            in_order(self.over)
        return self

    def times(self) -> dict[str, float]:
        return {} if self.over is None else {"over": self.over[1]}

    def answer(self, evidence: Evidence) -> Answer:
        cloud = cloud_named(evidence, self.of)
        first, last = (0.0, evidence.end_time) if self.over is None else self.over
        reached(last, evidence)
        ids, born = births_of(evidence, cloud)
        begun = np.maximum(born, first)
        ended = np.full(begun.size, np.inf)
        losses = evidence.losses()
        own = losses[losses["cloud"] == cloud.index]
        ended[np.searchsorted(ids, own["id"])] = own["time"]
        near = TIME_TOLERANCE * evidence.end_time
        there = (begun <= last) & (ended >= first)
        lost = np.sort(ended[there & (ended <= last + near)])
        spans = np.maximum(np.minimum(ended[there], last) - begun[there], 0.0)
        watched = float(spans.sum())
        if watched <= 0.0:
            raise AnswerError(f'no charge of "{self.of}" was there in this stretch of time')
        if lost.size == 0:
            raise AnswerError(
                f"none of {spans.size} charges was lost: longer than "
                f"{spelled(watched / _SURE, 's', 3)} with 95 % confidence"
            )
        tau = watched / lost.size
        early = int(np.sum(_watched_until(lost, begun[there], ended[there], last) < watched / 2.0))
        note = f"{lost.size} of {spans.size} charges lost{weight_in_words(cloud)}"
        if lost.size > 1:
            note += f"; {early} of them in the first half of the time watched"
            if abs(2.0 * early - lost.size) > _ODD * math.sqrt(lost.size):
                note += ": not an exponential loss"
        return self.answered(tau, tau / math.sqrt(lost.size), note)

    def words(self) -> str:
        window = "" if self.over is None else f", {window_in_words(self.over)}"
        return f'lifetime of cloud "{self.of}"{window}'


def _watched_until(times: Floats, begun: Floats, ended: Floats, last: float) -> Floats:
    """For how long all charges together had been watched at each of these times, s."""
    begun, ended = np.sort(begun), np.sort(np.minimum(ended, last))

    def summed(marks: Floats) -> Floats:
        """Sum over the marks of the time since each, where it has passed."""
        passed = np.searchsorted(marks, times, side="right")
        sums = np.concatenate([[0.0], np.cumsum(marks)])
        return np.asarray(passed * times - sums[passed])

    return summed(begun) - summed(ended)
