"""The error of a pair sum, measured on a few charges whose field is summed directly as well.

    error = sqrt(mean of (|dE_i| / |E_i|)^2),    |E_i| never taken below a hundredth of the
            root mean square field of all charges                                           (1)

so that a charge where the fields of the others happen to cancel does not decide. The charge of
each cancels in the ratio: the error of its force is that of the field it feels.

Which charges are taken follows from their ids and the number of the step alone: the same on any
number of threads and after a pause, others at every look.

References
----------
G. L. Steele, D. Lea, C. H. Flood, OOPSLA (2014) 453 (the numbers that mix the ids; from memory).
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.sampled import sampled_field

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

SampledField = Callable[[Ints, Floats, Floats, float, float, Floats], None]
"""(which, position, charge, softening2, constant, out_field): as coulomb/sampled.py."""

SAMPLE = 512
"""Charges of a sample: enough to know the root mean square to some ten per cent."""
LEAST_FIELD = 1e-2
"""The smallest field an error is held against, over the root mean square of all."""


@dataclass(frozen=True, slots=True)
class SampledError:
    """Relative errors of the fields of `sample` charges, eq. (1)."""

    rms: float
    percentile99: float
    largest: float
    sample: int


def sample_of(ids: Ints, charge: Floats, step: int, most: int = SAMPLE) -> Ints:
    """Indices, ascending, of up to `most` charges that are not lost, as drawn for a step."""
    there = np.flatnonzero(charge)
    if there.size <= most:
        return there
    drawn = _mixed(ids[there].astype(np.uint64) ^ _mixed(np.array([step], dtype=np.uint64)))
    return np.sort(there[np.argpartition(drawn, most)[:most]])


def sampled_error(
    position: Floats,
    charge: Floats,
    softening2: float,
    constant: float,
    field: Floats,
    which: Ints,
    exactly: SampledField = sampled_field,
) -> SampledError:
    """The error of `field` (3, n), V/m, at the charges `which`, eq. (1).

    position : (3, n), m; charge : (n,), C, macro-charges; softening2 : m^2
    exactly : what gives the true field at them
    """
    if which.size == 0:
        return SampledError(0.0, 0.0, 0.0, 0)
    exact = np.empty((3, which.size))
    exactly(which, position, charge, softening2, constant, exact)
    size = np.sqrt((exact**2).sum(axis=0))
    usual = math.sqrt(float((field**2).sum(axis=0)[charge != 0.0].mean()))
    gap = np.sqrt(((field[:, which] - exact) ** 2).sum(axis=0))
    floor = np.maximum(size, LEAST_FIELD * usual)
    error = np.divide(gap, floor, out=np.zeros_like(gap), where=floor != 0.0)
    return SampledError(
        math.sqrt(float((error**2).mean())),
        float(np.percentile(error, 99.0)),
        float(error.max()),
        int(which.size),
    )


def _mixed(numbers: NDArray[np.uint64]) -> NDArray[np.uint64]:
    """Each number turned into one that tells nothing of it."""
    mixed = (numbers + np.uint64(1)) * np.uint64(0x9E3779B97F4A7C15)
    for shift, factor in ((30, 0xBF58476D1CE4E5B9), (27, 0x94D049BB133111EB)):
        mixed = (mixed ^ (mixed >> np.uint64(shift))) * np.uint64(factor)
    return mixed ^ (mixed >> np.uint64(31))
