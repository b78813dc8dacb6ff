"""How much of a cloud is left, and how much of it passed a detector.

Both count simulated charges against those at the start, and those that sources bore. The error is
half the width of Wilson's interval (one standard deviation), so that none lost or all lost is not
told as certain.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import ClassVar, Literal

import numpy as np

from driftwell.answers.answer import Answer
from driftwell.answers.charges import number_born, weight_in_words
from driftwell.answers.evidence import CloudFacts, Evidence, Needs
from driftwell.answers.form import (
    TIME_TOLERANCE,
    InstantQuestion,
    QuestionForm,
    References,
    cloud_named,
    detector_named,
    instant_in_words,
)
from driftwell.answers.sampling import fraction_error
from driftwell.errors import AnswerError
from driftwell.forms import Name, key
from driftwell.forms.spelling import spelled


class FractionLeft(InstantQuestion):
    """Part of a cloud not lost to walls yet."""

    unit: ClassVar[str] = "1"
    ask: Literal["fraction-left"] = key("part of the cloud not lost yet")

    def needs(self, duration: float) -> Needs:
        return Needs()  # every loss is recorded with its time

    def answer(self, evidence: Evidence) -> Answer:
        time = self.time_in(evidence)
        cloud = _not_empty(cloud_named(evidence, self.of), evidence)
        born = evidence.born(cloud.name, time)
        losses = evidence.losses()
        before = losses["time"] <= time + TIME_TOLERANCE * evidence.end_time
        lost = np.unique(losses["id"][before & (losses["cloud"] == cloud.index)]).size
        if born == 0:
            raise AnswerError(f'no charge of "{cloud.name}" is born by {spelled(time, "s")}')
        left = born - lost
        note = f"{left} of {born} charges{weight_in_words(cloud)}"
        return self.answered(left / born, fraction_error(left, born), note)

    def words(self) -> str:
        return f'part of cloud "{self.of}" left {instant_in_words(self.at)}'


class DetectorQuestion(QuestionForm):
    """Base of questions about what passed a detector; a charge counts once, at its first pass."""

    of: Name = key("name of the detector")
    cloud: Name | None = key("count this cloud only; left out: all clouds", default=None)

    def refers_to(self) -> References:
        return References(() if self.cloud is None else (self.cloud,), (self.of,))

    def clouds(self, evidence: Evidence) -> Sequence[CloudFacts]:
        """The clouds counted. Raises AnswerError where they have no charges."""
        if self.cloud is not None:
            return [_not_empty(cloud_named(evidence, self.cloud), evidence)]
        every = [cloud_named(evidence, name) for name in evidence.clouds]
        found = [cloud for cloud in every if number_born(evidence, cloud)]
        if not found:
            raise AnswerError("there are no charges")
        return found

    def whose(self) -> str:
        """The clouds counted, in words."""
        return "all clouds" if self.cloud is None else f'cloud "{self.cloud}"'


class FractionThrough(DetectorQuestion):
    """Part of a cloud, or of all clouds, that passed a detector at least once."""

    unit: ClassVar[str] = "1"
    ask: Literal["fraction-through"] = key("part of the charges that passed a detector")

    def answer(self, evidence: Evidence) -> Answer:
        detector = detector_named(evidence, self.of)
        clouds = self.clouds(evidence)
        crossings = evidence.crossings()
        here = crossings["detector"] == detector
        passed = [
            int(np.unique(crossings["id"][here & (crossings["cloud"] == cloud.index)]).size)
            for cloud in clouds
        ]
        weight = np.array([cloud.weight for cloud in clouds])
        count = np.array([number_born(evidence, cloud) for cloud in clouds])
        share = float(weight @ passed / (weight @ count))
        # With unequal weights, as many equal ones as would scatter alike; else the count itself.
        trials = float((weight @ count) ** 2 / (weight**2 @ count))
        heavy = max(clouds, key=lambda cloud: cloud.weight)
        note = f"{sum(passed)} of {count.sum()} charges{weight_in_words(heavy)}"
        return self.answered(share, fraction_error(share * trials, trials), note)

    def words(self) -> str:
        return f'part of {self.whose()} that passes detector "{self.of}"'


def _not_empty(cloud: CloudFacts, evidence: Evidence) -> CloudFacts:
    if number_born(evidence, cloud) == 0:
        raise AnswerError(f'cloud "{cloud.name}" has no charges')
    return cloud
