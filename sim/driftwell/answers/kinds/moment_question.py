"""Questions answered from moments of a cloud: at one time, or averaged over a window."""

from __future__ import annotations

from typing import Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import Charges, charges_at, number_in_words, weight_in_words
from driftwell.answers.evidence import CloudFacts, Evidence, Moments, Needs
from driftwell.answers.form import (
    TIME_TOLERANCE,
    InstantQuestion,
    cloud_named,
    instant_in_words,
    reached,
)
from driftwell.answers.sampling import jackknife_error
from driftwell.answers.series import series_mean
from driftwell.errors import AnswerError
from driftwell.forms import NonNegative, Time, checked, key, refuse
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


class MomentQuestion(InstantQuestion):
    """Base of questions about moments.

    At one time the value is worked out from every charge, and its error is what another draw of
    charges would change. Over a window it is the mean of the values at every record, and its error
    is that of a mean in time: what the draw of the charges at the start fixed once and for all
    stays hidden in it.
    """

    over: tuple[NonNegative[Time], NonNegative[Time]] | None = key(
        "average over this stretch of time instead of `at`", default=None
    )

    @checked
    def _one_time(self) -> Self:
        if self.over is not None and self.at != "end":
            raise refuse("`at` and `over` exclude each other; give one of them")
        if self.over is not None and self.over[1] <= self.over[0]:
            raise refuse("`over` must end later than it begins")
        return self

    def needs(self, duration: float) -> Needs:
        return super().needs(duration) if self.over is None else Needs()

    def times(self) -> dict[str, float]:
        return super().times() if self.over is None else {"over": self.over[1]}

    def least_charges(self) -> int:
        """How many charges the value needs."""
        return 2

    def of_charges(self, charges: Charges) -> float:
        """The value from every charge at one time."""
        raise TypeError(f"{type(self).__name__} must say how it is worked out")

    def of_moments(self, moments: Moments, cloud: CloudFacts) -> Floats:
        """The value at each record, (k,), from moments of which none is NaN."""
        raise TypeError(f"{type(self).__name__} must say how it is worked out")

    def error_of(self, charges: Charges) -> float | None:
        """Sampling error of :meth:`of_charges`."""
        return jackknife_error(lambda keep: self.of_charges(charges.kept(keep)), len(charges))

    def remark(self, centre: Floats) -> str:
        """What else to know of the value, from the cloud's centre (6,)."""
        return ""

    def remark_at(self, charges: Charges) -> str:
        """The same of a value at one time, from every charge."""
        return self.remark(np.concatenate([charges.position, charges.velocity]).mean(axis=1))

    def answer(self, evidence: Evidence) -> Answer:
        if self.over is not None:
            return self._over(evidence, *self.over)
        charges = charges_at(evidence, self.of, self.time_in(evidence), self.least_charges())
        error = self.error_of(charges)
        notes = [number_in_words(len(charges), charges.cloud)]
        if error is None:
            notes.append("too few charges to tell an error from")
        notes.append(self.remark_at(charges))
        return self.answered(self.of_charges(charges), error, _joined(notes))

    def _over(self, evidence: Evidence, first: float, last: float) -> Answer:
        cloud = cloud_named(evidence, self.of)
        used, window = records_within(evidence, self.of, (first, last), self.least_charges())
        found = series_mean(self.of_moments(used, cloud))
        notes = [f"mean of {used.time.size} records {window}"]
        if found.error is None:
            notes.append(
                "no error: in this window the value changes too slowly against its length "
                f"(worth {found.independent:.2g} independent records)"
            )
        else:
            notes.append("the error is that of the mean in time")
        notes.append(weight_in_words(cloud).removeprefix(", "))
        notes.append(self.remark(used.centre.mean(axis=0)))
        return self.answered(found.mean, found.error, _joined(notes))

    def when(self) -> str:
        """The time or window in words."""
        if self.over is None:
            return instant_in_words(self.at)
        return f"averaged from {spelled(self.over[0], 's')} to {spelled(self.over[1], 's')}"


def records_within(
    evidence: Evidence, name: str, window: tuple[float, float], least: int
) -> tuple[Moments, str]:
    """Moments of a cloud at the records within a window that hold `least` charges, and the window.

    Raises AnswerError where there are none, or the run did not reach the window's end.
    """
    first, last = window
    reached(last, evidence)
    moments = evidence.moments(name)
    near = TIME_TOLERANCE * evidence.end_time
    inside = (moments.time >= first - near) & (moments.time <= last + near)
    words = f"from {spelled(first, 's')} to {spelled(last, 's')}"
    if not inside.any():
        raise AnswerError(f"no record lies in the window {words}; shorten `every` in [record]")
    enough = inside & (moments.count >= least)
    if not enough.any():
        raise AnswerError(f'"{name}" holds fewer than {least} charges {words}')
    if enough.sum() < inside.sum():
        words += f", until too few charges were left at {spelled(moments.time[enough][-1], 's')}"
    return _chosen(moments, enough), words


def _joined(notes: list[str]) -> str:
    return "; ".join(note for note in notes if note)


def _chosen(moments: Moments, keep: NDArray[np.bool_]) -> Moments:
    return Moments(
        moments.time[keep],
        moments.count[keep],
        moments.centre[keep],
        moments.covariance[keep],
        moments.kinetic_energy[keep],
        moments.kinetic_variance[keep],
    )
