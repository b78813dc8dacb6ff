"""Size of a beam at a place along it, or where it is largest, at one time.

The charges are cut into slices along the beam; the size of a slice is that of the charges within
it about their own middle (:mod:`driftwell.answers.extent`). Slices lie side by side over the
stretch that holds the middle 98 % of the charges; those with fewer than 40 charges say nothing.

Where the beam is largest is looked for in one half of the charges, and how large it is there is
taken from the other half, then the other way round, and the two are averaged: the largest of many
uncertain sizes would be one that chance made large. Where neighbouring slices are alike the value
may so be a little below the largest, by less than its error.
"""

from __future__ import annotations

from typing import ClassVar, Literal, Self

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.answer import Answer
from driftwell.answers.charges import charges_at, number_in_words
from driftwell.answers.evidence import Evidence
from driftwell.answers.extent import Measure, extent, extent_error, size_in_words
from driftwell.answers.form import AXES, Axis, InstantQuestion, instant_in_words
from driftwell.answers.sampling import Bools, group_of, jackknife_error
from driftwell.errors import AnswerError
from driftwell.forms import Length, Positive, checked, key, refuse
from driftwell.forms.spelling import spelled

Floats = NDArray[np.float64]

LEAST_IN_SLICE = 40
"""Fewer charges have no size worth comparing."""
SLICES = 20
"""Slices over the length of the beam where none is given."""
_ENDS = (0.01, 0.99)
_NEIGHBOURS = np.array([1.0, 2.0, 3.0, 2.0, 1.0])
_MOST_SLICES = 10_000


class BeamEnvelope(InstantQuestion):
    """Size of a beam across, at one place along it or where it is largest."""

    unit: ClassVar[str] = "m"
    ask: Literal["beam-envelope"] = key("size of a beam across, at a place along it or the largest")
    axis: Literal["x", "y", "z", "radius"] = key(
        'along this axis across the beam, or "radius": distance from the middle', default="radius"
    )
    beam_axis: Axis = key("axis the beam runs along", default="z")
    measure: Measure = key("rms; edge: the distance from the middle that holds 90 %", default="rms")
    where: Length | None = key(
        "place along the beam; left out: where the beam is largest", default=None, example="20 mm"
    )
    thickness: Positive[Length] | None = key(
        "thickness of a slice along the beam; left out: a twentieth of the beam's length",
        default=None,
        example="1 mm",
    )

    @checked
    def _across(self) -> Self:
        if self.axis == self.beam_axis:
            raise refuse("`axis` must be across `beam_axis`, not along it")
        return self

    def answer(self, evidence: Evidence) -> Answer:
        charges = charges_at(evidence, self.of, self.time_in(evidence), LEAST_IN_SLICE)
        along = charges.position[AXES.index(self.beam_axis)]
        places = charges.position[self._axes()]
        low, high = np.quantile(along, _ENDS)
        thick = self.thickness if self.thickness is not None else float(high - low) / SLICES
        if thick <= 0.0:
            raise AnswerError(f"the beam has no length along {self.beam_axis}")
        if self.where is not None:
            near = np.abs(along - self.where) <= 0.5 * thick
            value, error, where = self._at(places[:, near])
        else:
            value, error, where = self._largest(places, (along - low) / thick, low, thick)
        note = (
            f"{where} of {spelled(thick, 'm', 4)}; {number_in_words(len(charges), charges.cloud)}"
        )
        if error is None:
            note += "; too few charges to tell an error from"
        return self.answered(value, error, note)

    def _axes(self) -> list[int]:
        if self.axis != "radius":
            return [AXES.index(self.axis)]
        return [k for k in range(3) if k != AXES.index(self.beam_axis)]

    def _at(self, places: Floats) -> tuple[float, float | None, str]:
        count = places.shape[1]
        if count < LEAST_IN_SLICE:
            raise AnswerError(
                f"{count} charges lie in the slice; needs at least {LEAST_IN_SLICE}: give a larger "
                "`thickness`"
            )
        value, error = extent(places, self.measure), extent_error(places, self.measure)
        return value, error, f"{count} charges in the slice"

    def _largest(
        self, places: Floats, along: Floats, low: float, thick: float
    ) -> tuple[float, float | None, str]:
        """The largest slice; `along` : places along the beam in slices, 0 at `low`."""
        if along.max() - along.min() > _MOST_SLICES:
            raise AnswerError("`thickness` is too small against the beam's length")
        slices = np.floor(along).astype(np.int64)
        half = group_of(slices.size) % 2
        found = [_widest(places, slices, half == side, self.measure) for side in (0, 1)]
        told = [(slices == found[side]) & (half != side) for side in (0, 1)]

        def value(keep: Bools) -> float:
            sizes = [extent(places[:, own & keep], self.measure) for own in told]
            return 0.5 * (sizes[0] + sizes[1])

        whole = value(np.ones(slices.size, dtype=np.bool_))
        if self.measure == "rms":
            error = jackknife_error(value, slices.size)
        else:
            errors = [extent_error(places[:, own], "edge") for own in told]
            error = None if None in errors else 0.5 * float(np.hypot(*errors))  # type: ignore[arg-type]
        middles = sorted({low + (number + 0.5) * thick for number in found})
        where = " and ".join(spelled(middle, "m", 4) for middle in middles)
        count = int(sum(own.sum() for own in told))
        plural = "s" if len(middles) > 1 else ""
        return (
            whole,
            error,
            f"largest at {self.beam_axis} = {where}, {count} charges in the slice{plural}",
        )

    def words(self) -> str:
        where = "where it is largest"
        if self.where is not None:
            where = f"at {self.beam_axis} = {spelled(self.where, 'm')}"
        return (
            f'{size_in_words(self.measure, self.axis)} of beam "{self.of}" {where}, '
            f"{instant_in_words(self.at)}"
        )


def _widest(places: Floats, slices: NDArray[np.int64], half: Bools, measure: Measure) -> int:
    """Number of the slice that is widest in one half of the charges.

    Only slices with enough charges in either half count. Raises AnswerError where there is none.
    """
    first = int(slices.min())
    within, without = (np.bincount(slices[own] - first) for own in (half, ~half))
    shared = min(within.size, without.size)
    enough = np.minimum(within[:shared], without[:shared]) >= LEAST_IN_SLICE // 2
    if not enough.any():
        raise AnswerError(f"no slice holds {LEAST_IN_SLICE} charges; give a larger `thickness`")
    rows = np.flatnonzero(half)
    rows = rows[np.argsort(slices[rows], kind="stable")]
    ends = np.cumsum(within)
    sizes = np.zeros(shared)
    for k in np.flatnonzero(enough):
        sizes[k] = extent(places[:, rows[ends[k] - within[k] : ends[k]]], measure)
    # Neighbouring slices are much alike: together they tell better where the widest is.
    smooth = _with_neighbours(sizes) / np.maximum(_with_neighbours(enough.astype(np.float64)), 1.0)
    return first + int(np.where(enough, smooth, 0.0).argmax())


def _with_neighbours(values: Floats) -> Floats:
    """Sums (k,) of each value and its neighbours', those beyond the ends being zero."""
    return np.convolve(np.pad(values, _NEIGHBOURS.size // 2), _NEIGHBOURS, "valid")
