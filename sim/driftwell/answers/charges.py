"""The charges of one cloud at one time, and what is said of their number."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import STANDING
from driftwell.answers.evidence import CloudFacts, Evidence
from driftwell.answers.form import cloud_named
from driftwell.errors import AnswerError
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class Charges:
    """Charges of one cloud alive at one time, in the order of their ids.

    position : (3, n) float64, m
    velocity : (3, n) float64, proper velocity, m/s
    cloud : the cloud they belong to
    """

    position: Floats
    velocity: Floats
    cloud: CloudFacts

    def __len__(self) -> int:
        return int(self.position.shape[1])

    def kept(self, keep: NDArray[np.bool_]) -> Charges:
        """Those where `keep`, (n,), is true."""
        return Charges(self.position[:, keep], self.velocity[:, keep], self.cloud)


def charges_at(evidence: Evidence, name: str, time: float, least: int = 1) -> Charges:
    """The charges of the cloud `name` alive at `time`, s.

    Raises AnswerError where there are fewer than `least`.
    """
    cloud = cloud_named(evidence, name)
    snapshot = evidence.snapshot(time)
    own = snapshot.cloud == cloud.index
    charges = Charges(snapshot.position[own].T, snapshot.velocity[own].T, cloud)
    if len(charges) == 0:
        raise AnswerError(f'no charge of "{name}" is left at {spelled(time, "s")}')
    if len(charges) < least:
        raise AnswerError(f"needs at least {least} charges, there are {len(charges)}")
    return charges


def number_born(evidence: Evidence, cloud: CloudFacts) -> int:
    """How many simulated charges of a cloud there have been until the end of the run."""
    return evidence.born(cloud.name)


def births_of(evidence: Evidence, cloud: CloudFacts) -> tuple[NDArray[np.int64], Floats]:
    """Ids of a cloud's charges, ascending, and when each came to be, s."""
    if not cloud.emitted:
        return np.arange(cloud.first_id, cloud.first_id + cloud.count), np.zeros(cloud.count)
    rows = evidence.births()
    own = np.sort(rows[rows["cloud"] == cloud.index], order="id")
    return own["id"], own["time"]


def number_in_words(count: int, cloud: CloudFacts) -> str:
    """How many simulated charges a value is from, and what they stand for."""
    said = f"{count} charges" if count != 1 else "1 charge"
    if count != cloud.count:
        said = f"{count} of {cloud.count} charges"
    return said + weight_in_words(cloud)


def weight_in_words(cloud: CloudFacts) -> str:
    """How many a simulated charge stands for, where they are several."""
    return "" if cloud.weight == 1.0 else f", {STANDING} {cloud.weight:.6g}"
