"""Whether a run's pair sum is as accurate as the scenario asks: measured, told, and mended.

At the start, at the end, and at records on the way whenever the measuring has cost less than a
fiftieth of the run so far, the field at hand is compared with the direct sum at a sample of the
charges (sampled_error.py). The cost is counted in pairs, never by the clock, so that a run measures
at the same records wherever and however often it pauses. A sum that is far better than asked is
loosened at the start, since its settings suit harder clouds.

Where the error is larger than asked, all the time since the last good look counts as time in which
the promise was not kept. The sum is tightened until a look finds it good, and the field at hand is
taken anew with it, so that not one more step is made with the old one.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.coulomb.sampled_error import SAMPLE, SampledError, sample_of, sampled_error
from driftwell.coulomb.summation import Summation
from driftwell.forms import spelled

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

SHARE = 0.02
"""Part of the run's pairs that measuring may cost."""
SLOWNESS = 2.0
"""Time of a pair seen from one side only, as in the sample, over that of one of n^2."""
MARGIN = 2.0
"""How much smaller than asked a mended sum's error is meant to be."""
GOAL, FITTED, WORTH = 0.6, 0.8, 0.7
"""Of the accuracy: what a sum is loosened to at the start, and what it may then err; and of the
former, what a better sum must err by to be worth loosening."""
TRIES = 6
"""How often a sum is tightened at one look."""
TOLD = 3
"""Breaches told while the run goes on; the others are summed up at its end."""


@dataclass(frozen=True, slots=True)
class Breach:
    """One look that found the sum less accurate than asked.

    since, time : s, of the last good look (or the start), and of this one
    error : rms relative force error found; mended : the same after tightening
    """

    since: float
    time: float
    error: float
    mended: float


@dataclass(frozen=True, slots=True)
class Broken:
    """How badly a run's promise was kept: the error asked for and the worst found, for how long.

    seconds : s of the run's time, at the most
    unmended : whether the last look could not make it good
    """

    accuracy: float
    worst: float
    seconds: float
    unmended: bool


@dataclass(frozen=True, slots=True)
class Scene:
    """What a look looks at: all at one time of a run.

    position : (3, n), m; charge : (n,), C, macro-charges, 0 where lost; id : (n,)
    field : (3, n), V/m, the sum's at these positions; overwritten where the sum is mended
    sums : number of sums the run has taken since it began
    last : whether the run ends here
    """

    time: float
    step: int
    sums: float
    position: Floats
    charge: Floats
    id: Ints
    field: Floats
    last: bool = False


class Promise:
    """Keeps watch over the accuracy of one run's pair sum."""

    def __init__(self, accuracy: float, state: Mapping[str, NDArray[Any]] | None = None) -> None:
        """A new watch, or one that goes on from its :meth:`state`."""
        self.accuracy = accuracy
        self.breaches: list[Breach] = []
        self._sums = self._counted = self._spent = self._error = 0.0
        self._last = -1.0
        if state is not None:
            numbers = state["watch"].tolist()
            self._sums, self._counted, self._spent, self._error, self._last = numbers
            self.breaches = [Breach(*row) for row in state["breaches"].tolist()]

    def state(self) -> dict[str, Floats]:
        """Everything a resume needs, by name."""
        numbers = [self._sums, self._counted, self._spent, self._error, self._last]
        rows = [(each.since, each.time, each.error, each.mended) for each in self.breaches]
        return {"watch": np.array(numbers), "breaches": np.array(rows).reshape(-1, 4)}

    def error(self, summation: Summation) -> float:
        """The rms relative force error last measured; 0 for a sum that errs by rounding only."""
        return 0.0 if summation.exact else self._error

    def look(self, summation: Summation, scene: Scene) -> tuple[Summation, float, list[str]]:
        """Measure where it is due, and mend.

        Returns
        -------
        summation : the one to use from now on; ``scene.field`` is its field
        error : rms relative force error of the field as it came, of the last look if none is due
        told : sentences for the user
        """
        self._counted += (scene.sums - self._sums) * summation.pairs
        self._sums = scene.sums
        first = self._last < 0.0
        error = self.error(summation)
        if summation.exact or not (first or scene.last or self._affordable(scene)):
            return summation, error, []
        which = sample_of(scene.id, scene.charge, scene.step)
        if which.size < 2:
            return summation, error, []
        self._spent += _cost(scene)
        found = _measured(summation, scene, which)
        if found.rms <= self.accuracy:
            if first:
                summation, found = self._fitted(summation, scene, which, found)
            self._last, self._error = scene.time, found.rms
            return summation, found.rms, [_at_the_start(found)] if first else []
        mended, after = self._mended(summation, scene, which, found)
        since = scene.time if first else self._last
        self.breaches.append(Breach(since, scene.time, found.rms, after.rms))
        self._last, self._error = scene.time, after.rms
        told = self._sentences(self.breaches[-1]) if len(self.breaches) <= TOLD else []
        # nothing was computed yet with what is measured at the start
        return mended, after.rms if first else found.rms, told

    def broken(self, time: float) -> Broken | None:
        """What is to be said against a run that ended at `time`, s; None where all was kept."""
        unmended = self._bad(self._error)
        used = [each for each in self.breaches if each.time > each.since or self._bad(each.mended)]
        if not used:
            return None
        seconds = math.fsum(each.time - each.since for each in used)
        return Broken(
            self.accuracy,
            max(each.mended if each.time == each.since else each.error for each in used),
            seconds + (time - self._last if unmended else 0.0),
            unmended,
        )

    def _bad(self, error: float) -> bool:
        return not error <= self.accuracy

    def _affordable(self, scene: Scene) -> bool:
        return self._spent + _cost(scene) <= SHARE * self._counted

    def _fitted(
        self, summation: Summation, scene: Scene, which: Ints, found: SampledError
    ) -> tuple[Summation, SampledError]:
        """Loosen a sum far better than asked: settings suit the hardest cloud, not this one."""
        factor = found.rms / (GOAL * self.accuracy)
        looser = summation.tightened(factor) if factor < WORTH else summation
        if looser is summation:
            return summation, found
        before = scene.field.copy()
        looser.field(scene.position, scene.charge, scene.field)
        looked = _measured(looser, scene, which)
        if looked.rms <= FITTED * self.accuracy:
            return looser, looked
        scene.field[...] = before
        return summation, found

    def _mended(
        self, summation: Summation, scene: Scene, which: Ints, found: SampledError
    ) -> tuple[Summation, SampledError]:
        """Tighten until the error is as asked, or nothing can be gained any more."""
        for _ in range(TRIES):
            factor = MARGIN * found.rms / self.accuracy if math.isfinite(found.rms) else 10.0
            better = summation.tightened(factor)
            if better is summation or not self._bad(found.rms):
                break
            summation = better
            summation.field(scene.position, scene.charge, scene.field)
            found = _measured(summation, scene, which)
        return summation, found

    def _sentences(self, breach: Breach) -> list[str]:
        at = f"At t = {spelled(breach.time, 's')}" if breach.time > 0.0 else "At the start"
        text = (
            f"{at} the Coulomb sum errs by {breach.error:.1e} of the force (rms), more than "
            f"coulomb.accuracy = {self.accuracy:g}"
        )
        if breach.time > breach.since:
            text += f"; the last look that found it good was at t = {spelled(breach.since, 's')}"
        if self._bad(breach.mended):
            text += (
                f". Tightened as far as it goes it errs by {breach.mended:.1e}: use "
                'coulomb.method = "direct", or ask for less.'
            )
        else:
            text += f". It is tightened from here on, and now errs by {breach.mended:.1e}."
        if len(self.breaches) == TOLD:
            text += " Further looks like this one are told at the end."
        return [text]


def _measured(summation: Summation, scene: Scene, which: Ints) -> SampledError:
    return sampled_error(
        scene.position,
        scene.charge,
        summation.softening2,
        summation.constant,
        scene.field,
        which,
        summation.sampled_field,
    )


def _cost(scene: Scene) -> float:
    """Pairs, of those of the direct sum, that one look costs."""
    return SLOWNESS * min(SAMPLE, scene.charge.size) * scene.charge.size


def _at_the_start(found: SampledError) -> str:
    return (
        f"Coulomb sum measured against the direct one at {found.sample} charges: it errs by "
        f"{found.rms:.1e} of the force (rms), 99 % of them by less than {found.percentile99:.1e}, "
        f"at most by {found.largest:.1e}"
    )
