"""What passed a detector: the rows of the record as arrays, and the current they carry.

    I = sum over passages of w q s / t,   s = +1 along the detector's normal, -1 against it    (1)

    error^2 = ((sum k^2 - (sum k)^2 / N) (w q / t)^2,  k the net passages of a charge          (2)

for each cloud, N its charges. Whether a charge passes within the window counts as chance, drawn
for each charge by itself; where none or all of them do, half the width of Wilson's interval takes
the place of eq. 2. Charges that a source lets go evenly in time scatter less than that.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.charges import number_born, weight_in_words
from driftwell.answers.evidence import CloudFacts, Evidence
from driftwell.answers.form import TIME_TOLERANCE, detector_named, reached
from driftwell.answers.moments import kinetic_energies
from driftwell.answers.sampling import Bools, fraction_error
from driftwell.errors import AnswerError
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]
Window = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Passages:
    """Passages through one detector, in the order of time.

    id, cloud : (n,) int64; direction : (n,), +1 or -1
    time : (n,) s; position : (3, n) m; velocity : (3, n) m/s, proper
    weight : (n,); charge : (n,) C and mass : (n,) kg, of one real particle
    """

    id: NDArray[np.int64]
    cloud: NDArray[np.int64]
    direction: Floats
    time: Floats
    position: Floats
    velocity: Floats
    weight: Floats
    charge: Floats
    mass: Floats

    def __len__(self) -> int:
        return int(self.time.size)

    def kept(self, keep: Bools | NDArray[np.int64]) -> Passages:
        """Those where `keep`, (n,), is true, or with these numbers."""
        return Passages(
            self.id[keep],
            self.cloud[keep],
            self.direction[keep],
            self.time[keep],
            self.position[:, keep],
            self.velocity[:, keep],
            self.weight[keep],
            self.charge[keep],
            self.mass[keep],
        )

    @property
    def energy(self) -> Floats:
        """Kinetic energies, (n,) J, of one real particle each."""
        return np.asarray(kinetic_energies(self.velocity, 1.0) * self.mass)


@dataclass(frozen=True, slots=True)
class Current:
    """Net current along a detector's normal, A, its error, and the charges that carried it."""

    value: float
    error: float
    charges: int

    @property
    def relative_error(self) -> float:
        """Raises AnswerError where nothing flows, which has none."""
        if self.value == 0.0:
            raise AnswerError("no current flows through the detector in this window")
        return abs(self.error / self.value)


def passages(evidence: Evidence, name: str, clouds: Sequence[CloudFacts]) -> Passages:
    """All passages of these clouds through the detector `name`."""
    detector = detector_named(evidence, name)
    rows = evidence.crossings()
    known = {cloud.index: cloud for cloud in clouds}
    ours = np.isin(rows["cloud"], list(known))
    rows = rows[(rows["detector"] == detector) & ours]
    rows = rows[np.argsort(rows["time"], kind="stable")]
    numbers = np.asarray(rows["cloud"], dtype=np.int64)
    return Passages(
        np.asarray(rows["id"], dtype=np.int64),
        numbers,
        np.asarray(rows["direction"], dtype=np.float64),
        np.asarray(rows["time"], dtype=np.float64),
        np.ascontiguousarray(rows["position"].T),
        np.ascontiguousarray(rows["velocity"].T),
        np.asarray(rows["weight"], dtype=np.float64),
        np.array([known[k].charge for k in numbers], dtype=np.float64),
        np.array([known[k].mass for k in numbers], dtype=np.float64),
    )


def first_of_each(passed: Passages) -> Passages:
    """The first passage of each charge, in the order of their ids."""
    _, first = np.unique(passed.id, return_index=True)
    return passed.kept(first)


def within(passed: Passages, window: Window | None, evidence: Evidence) -> Passages:
    """Those within a stretch of time, s. Raises AnswerError where the run did not reach its end."""
    if window is None:
        return passed
    reached(window[1], evidence)
    near = TIME_TOLERANCE * evidence.end_time
    return passed.kept((passed.time >= window[0] - near) & (passed.time <= window[1] + near))


def alike(passed: Passages, least: int, name: str) -> Passages:
    """The same passages, when they are enough and all count alike.

    Raises AnswerError where there are fewer than `least`, or charges stand for different numbers.
    """
    if len(passed) < least:
        raise AnswerError(f'{len(passed)} charges passed detector "{name}"; needs at least {least}')
    if np.ptp(passed.weight) > 1e-12 * passed.weight.max():
        raise AnswerError("charges stand for different numbers; name one cloud with `cloud`")
    return passed


def one_species(passed: Passages) -> tuple[float, float]:
    """Charge, C, and mass, kg, of those that passed. Raises AnswerError where they differ."""
    charge, mass = float(passed.charge[0]), float(passed.mass[0])
    if np.any(passed.charge != charge) or np.any(passed.mass != mass):
        raise AnswerError("charges of different kinds passed; name one cloud with `cloud`")
    return charge, mass


def current_of(
    passed: Passages, window: Window, clouds: Sequence[CloudFacts], evidence: Evidence
) -> Current:
    """The current, eq. 1, of passages that all lie within `window`, s."""
    span = window[1] - window[0]
    value, square = 0.0, 0.0
    for cloud in clouds:
        own = passed.kept(passed.cloud == cloud.index)
        carried = own.direction * own.weight
        value += cloud.charge * float(carried.sum()) / span
        born = number_born(evidence, cloud)
        if born == 0:
            continue
        _, whose = np.unique(own.id, return_inverse=True)
        net = np.bincount(whose.ravel(), carried, minlength=0)
        unit = float(own.weight.max()) if len(own) else cloud.weight
        spread = float(np.sum(net**2)) - float(net.sum()) ** 2 / born
        least = unit * born * fraction_error(int(np.count_nonzero(net)), born)
        square += (cloud.charge / span) ** 2 * max(spread, least**2)
    return Current(value, math.sqrt(square), int(np.unique(passed.id).size))


def passages_in_words(passed: Passages, clouds: Sequence[CloudFacts], window: Window | None) -> str:
    """How many charges a value is from, and when they passed."""
    count = int(np.unique(passed.id).size)
    said = f"{count} charges" if count != 1 else "1 charge"
    if window is not None:
        said += f" from {spelled(window[0], 's')} to {spelled(window[1], 's')}"
    heavy = max(clouds, key=lambda cloud: cloud.weight)
    return said + weight_in_words(heavy)
