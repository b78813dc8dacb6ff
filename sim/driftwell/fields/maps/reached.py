"""How well a map gives back the field it was made from."""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True)
class NearErrors:
    """Errors of the field at test points by their distance from the nearest surface.

    edges : (k + 1,) float64, m; the last is infinite
    count : (k,) int64, points between two edges
    rms, largest : (k,) float64, of the worst electrode, as parts of its rms field; nan of none
    """

    edges: Floats
    count: NDArray[np.int64]
    rms: Floats
    largest: Floats


@dataclass(frozen=True, slots=True)
class Reached:
    """Errors of a map's field at random points, as parts of the field's rms over the open region.

    Of several electrodes the worst counts. Test points nearer than `clearance` to a surface are
    told in `near` only: not even a fine grid follows the field at a sharp edge.

    wanted : largest error asked for
    rms, largest : beyond the clearance
    clearance : m
    points : number of test points, near ones too
    near : all of them by distance
    rms_field : (e,) float64, 1/m: rms field of each electrode at 1 V, beyond the clearance
    evaluations : points the field was worked out at, for the grids that were tried too
    """

    wanted: float
    rms: float
    largest: float
    clearance: float
    points: int
    near: NearErrors
    rms_field: Floats
    evaluations: int

    @property
    def met(self) -> bool:
        """Whether the error asked for was reached."""
        return self.largest <= self.wanted

    def words(self) -> str:
        """One sentence, with what was asked for."""
        beyond = f" farther than {self.clearance:.3g} m from the electrodes" * (self.clearance > 0)
        how = "within" if self.met else "NOT within"
        return (
            f"field error at most {self.largest:.2g}, rms {self.rms:.2g} of the rms field{beyond}, "
            f"{how} the {self.wanted:.2g} asked for"
        )

    def arrays(self) -> dict[str, NDArray[np.generic]]:
        """All of it by name."""
        return {
            "error": np.array([self.wanted, self.rms, self.largest, self.clearance]),
            "error_counts": np.array([self.points, self.evaluations]),
            "rms_field": self.rms_field,
            "near_edges": self.near.edges,
            "near_count": self.near.count,
            "near_rms": self.near.rms,
            "near_largest": self.near.largest,
        }


def reached_from(arrays: dict[str, NDArray[np.generic]]) -> Reached:
    """What :meth:`Reached.arrays` gave."""
    wanted, rms, largest, clearance = (float(x) for x in arrays["error"])
    points, evaluations = (int(x) for x in arrays["error_counts"])
    near = NearErrors(
        np.asarray(arrays["near_edges"], dtype=np.float64),
        np.asarray(arrays["near_count"], dtype=np.int64),
        np.asarray(arrays["near_rms"], dtype=np.float64),
        np.asarray(arrays["near_largest"], dtype=np.float64),
    )
    field = np.asarray(arrays["rms_field"], dtype=np.float64)
    return Reached(wanted, rms, largest, clearance, points, near, field, evaluations)


def errors_by_distance(error: Floats, distance: Floats, edges: Floats) -> NearErrors:
    """Errors (e, n) of each electrode as parts of its rms field, by distance (n,)."""
    count, rms, largest = [], [], []
    for low, high in pairwise(edges):
        here = error[:, (distance >= low) & (distance < high)]
        count.append(here.shape[1])
        rms.append(float(np.sqrt(np.mean(here**2, axis=1)).max()) if here.size else np.nan)
        largest.append(float(here.max()) if here.size else np.nan)
    return NearErrors(edges, np.array(count, dtype=np.int64), np.array(rms), np.array(largest))
