"""What a run kept that questions are answered from.

The record's reader fulfils :class:`Evidence`; tests fulfil it with a few arrays.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class CloudFacts:
    """A cloud at its start: ids ``first_id <= id < first_id + count``; SI, of one real particle.

    emitted : whether it is a source, whose charges are born in the run; `count` is then how many
        it may bear at the most
    """

    name: str
    index: int
    species: str
    mass: float
    charge: float
    weight: float
    first_id: int
    count: int
    emitted: bool = False


@dataclass(frozen=True, slots=True)
class Snapshot:
    """Every charge alive at one time, in the order of their ids.

    time : s
    id, cloud : (n,) int64
    position : (n, 3) float64, m
    velocity : (n, 3) float64, proper velocity gamma v, m/s
    charge : (n,) C and mass : (n,) kg, of one real particle; weight : (n,)
    """

    time: float
    id: Ints
    cloud: Ints
    position: Floats
    velocity: Floats
    charge: Floats
    mass: Floats
    weight: Floats


@dataclass(frozen=True, slots=True)
class Moments:
    """Moments of one cloud in time, over its charges alive; NaN where none is left.

    time : (k,) s
    count : (k,) int64, simulated charges alive
    centre : (k, 6), mean of (x, y, z, ux, uy, uz), u the proper velocity; m and m/s
    covariance : (k, 6, 6), of the same six, about the mean (divided by count)
    kinetic_energy : (k,) J, mean of one real particle
    kinetic_variance : (k,) J^2
    """

    time: Floats
    count: Ints
    centre: Floats
    covariance: Floats
    kinetic_energy: Floats
    kinetic_variance: Floats


@dataclass(frozen=True, slots=True)
class TraceRequest:
    """A coordinate to be sampled finely and evenly while the run goes on.

    cloud : its centre of mass, or with `charge` (counted from 0 within the cloud) that one charge
    axis : 0, 1 or 2
    every : s, time between samples; None leaves it to the run (at least 20 per fastest period)
    """

    cloud: str
    charge: int | None
    axis: int
    every: float | None


@dataclass(frozen=True, slots=True)
class Needs:
    """What a question needs the run to keep: snapshots at these times, and traces."""

    snapshots: tuple[float, ...] = ()
    traces: tuple[TraceRequest, ...] = ()


class Evidence(Protocol):
    """What was recorded of one run."""

    @property
    def clouds(self) -> Mapping[str, CloudFacts]:
        """The clouds by name."""

    @property
    def detectors(self) -> Sequence[str]:
        """Names of the detectors, in the order of the scenario."""

    @property
    def softening(self) -> float:
        """Softening length of the Coulomb sum, m."""

    @property
    def field_error(self) -> float:
        """Relative rms error of the electrodes' solved field; 0 where there is none."""

    def coulomb_error(self, until: float) -> float:
        """Largest rms relative error of the Coulomb forces measured up to a time, s."""

    @property
    def end_time(self) -> float:
        """Time the run reached, s."""

    def snapshot(self, time: float) -> Snapshot:
        """The snapshot recorded at `time` (to a billionth of the duration).

        Raises AnswerError where none was recorded then.
        """

    def moments(self, cloud: str) -> Moments:
        """Moments of a cloud at every record."""

    def losses(self) -> NDArray[np.void]:
        """Charges lost: fields time, id, cloud, wall, position (3), velocity (3),
        kinetic_energy, weight."""

    def crossings(self) -> NDArray[np.void]:
        """Passages through detectors: fields time, id, cloud, detector, direction (+1 or -1),
        position (3), velocity (3), weight."""

    def births(self) -> NDArray[np.void]:
        """Charges that sources bore: fields time, id, cloud, position (3), velocity (3), weight."""

    def born(self, cloud: str, until: float = np.inf) -> int:
        """Simulated charges of a cloud or source that were there, or born, by a time, s."""

    def trace(self, request: TraceRequest) -> tuple[Floats, Floats]:
        """Times and values of a traced coordinate."""
