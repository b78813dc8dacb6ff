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

_LEAST = {"mean": 1, "rms": 2, "fwhm": 20}


class ArrivalTime(DetectorQuestion):
    """Mean or spread of the times at which charges first pass a detector."""

    unit: ClassVar[str] = "s"
    ask: Literal["arrival-time"] = key("when charges pass a detector for the first time")
    statistic: Literal["mean", "rms", "fwhm"] = key(
        "mean; rms: standard deviation; fwhm: full width at half maximum", default="mean"
    )

    def answer(self, evidence: Evidence) -> Answer:
        times = self._times(evidence)
        least = _LEAST[self.statistic]
        if times.size < least:
            raise AnswerError(
                f'{times.size} charges passed detector "{self.of}"; needs at least {least}'
            )
        clouds = self.clouds(evidence)
        note = f"{times.size} charges{weight_in_words(clouds[0])}"
        value, error = _statistic(self.statistic, times)
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
        what = {"mean": "mean", "rms": "rms spread", "fwhm": "full width at half maximum"}
        return (
            f'{what[self.statistic]} of the arrival times of {self.whose()} at detector "{self.of}"'
        )


def _statistic(which: str, times: Floats) -> tuple[float, float | None]:
    if which == "mean":
        return float(times.mean()), mean_error(times)
    if which == "fwhm":
        return full_width(times)
    return float(times.std()), jackknife_error(lambda keep: float(times[keep].std()), times.size)
