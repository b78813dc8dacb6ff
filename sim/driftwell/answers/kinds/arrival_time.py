"""When charges reach a detector: mean, rms spread or full width at half maximum of their times.

A charge counts once, with its first passage.
"""

from __future__ import annotations

from typing import ClassVar, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import weight_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.form import detector_named
from driftwell.answers.kinds.fractions import DetectorQuestion
from driftwell.answers.peak_width import full_width
from driftwell.answers.sampling import jackknife_error, mean_error
from driftwell.errors import AnswerError
from driftwell.forms import key

Floats = NDArray[np.float64]

Statistic = Literal["mean", "rms", "fwhm"]
LEAST = {"mean": 1, "rms": 2, "fwhm": 20}
"""Charges each statistic needs."""
STATISTICS = {"mean": "mean", "rms": "rms spread", "fwhm": "full width at half maximum"}
"""Each in words."""


class ArrivalTime(DetectorQuestion):
    """Mean or spread of the times at which charges first pass a detector."""

    unit: ClassVar[str] = "s"
    ask: Literal["arrival-time"] = key("when charges pass a detector for the first time")
    statistic: Statistic = key(
        "mean; rms: standard deviation; fwhm: full width at half maximum", default="mean"
    )

    def answer(self, evidence: Evidence) -> Answer:
        times = self._times(evidence)
        least = LEAST[self.statistic]
        if times.size < least:
            raise AnswerError(
                f'{times.size} charges passed detector "{self.of}"; needs at least {least}'
            )
        clouds = self.clouds(evidence)
        note = f"{times.size} charges{weight_in_words(clouds[0])}"
        value, error = statistic_of(self.statistic, times)
        if error is None:
            note += "; too few different times to tell an error from"
        return self.answered(value, error, note)

    def _times(self, evidence: Evidence) -> Floats:
        """First passages of the charges counted, s, in the order of their ids."""
        detector = detector_named(evidence, self.of)
        clouds = self.clouds(evidence)
        if len({cloud.weight for cloud in clouds}) > 1:
            raise AnswerError(
                "charges of different clouds stand for different numbers; name one with `cloud`"
            )
        crossings = evidence.crossings()
        ours = np.isin(crossings["cloud"], [cloud.index for cloud in clouds])
        rows = crossings[(crossings["detector"] == detector) & ours]
        rows = rows[np.argsort(rows["time"], kind="stable")]
        _, first = np.unique(rows["id"], return_index=True)
        return np.asarray(rows["time"][first], dtype=np.float64)

    def words(self) -> str:
        return (
            f"{STATISTICS[self.statistic]} of the arrival times of {self.whose()} at detector "
            f'"{self.of}"'
        )


def statistic_of(which: Statistic, values: Floats) -> tuple[float, float | None]:
    """A statistic of independent values (n,), in their unit, and its error."""
    if which == "mean":
        return float(values.mean()), mean_error(values)
    if which == "fwhm":
        return full_width(values)
    return float(values.std()), jackknife_error(lambda keep: float(values[keep].std()), values.size)
