"""The search for a limit: which runs are needed next, and what has been found.

A search is told what its runs answered and says which it wants next, round by round, until it has a
verdict. It depends on nothing else: the same answers lead the same way, so that a search that was
cut off goes on as if it had not been.
"""

from __future__ import annotations

import math
from dataclasses import dataclass, field

import numpy as np

from driftwell.study.crossing import Crossing, Known, crossing
from driftwell.study.limit_asked import Asked, Place
from driftwell.study.limit_bracket import Bracket, brackets, division
from driftwell.study.limit_noise import Pooled, Reading, pooled

FOUND = "found"
NO_CROSSING = "no crossing"
SEVERAL = "several crossings"
TOO_NOISY = "noise too large"
NOT_REACHED = "not reached"
RUNS_FAILED = "runs failed"

CLEAR = 3.0
"""Errors from the threshold from which on the side is clear."""
_SURELY = 3.5
"""The same where several crossings are to be told from chance."""
_MOST_REPLICAS = 8
"""Most new seeds at one place in a round."""
_COMPARED = 4
"""Runs beyond the first of each place that must be there before the answers' own errors are
believed, where the resolution hangs on them."""
_DOUBT = 4.0
"""Factor by which these errors are doubted."""
_MOST_FAILED = 3
_FAILED_SHARE = 0.1
"""Both from which on failures end a search: a number, and a part of all runs."""
_SAME = 0.05
"""Places closer than this part of the interval are one, where noise is what matters."""


@dataclass(frozen=True, slots=True)
class Wanted:
    """A run: place, and which replica of it, counted from 1; `round` counted from 1."""

    place: Place
    replica: int
    round: int


@dataclass(frozen=True, slots=True)
class Verdict:
    """What a search has found.

    word : one of those above
    interval : of the crossing, SI, ascending; None where there is none
    best : the likeliest value, SI
    rising : whether the answer rises through the threshold as the value grows
    certain : whether the interval holds by the values beside it, without any probability
    brackets : where the answer crosses, SI, for several crossings
    above : on which side all answers are, for no crossing
    needed : about how many runs would reach the resolution, where they were too few
    """

    word: str
    interval: tuple[float, float] | None = None
    best: float = math.nan
    rising: bool = True
    certain: bool = False
    brackets: tuple[tuple[float, float], ...] = ()
    above: bool = True
    needed: int = 0


@dataclass(slots=True)
class Search:
    """A search while it goes on.

    readings : what is known at each place, by its share of the range
    places : all places with runs, by share
    verdict : None while it goes on
    intervals : after each round that had one: round, runs, interval in SI
    crossing : what is known of the crossing, where answers have errors
    """

    asked: Asked
    readings: dict[float, list[Reading]] = field(default_factory=dict)
    places: dict[float, Place] = field(default_factory=dict)
    verdict: Verdict | None = None
    intervals: list[tuple[int, int, float, float]] = field(default_factory=list)
    crossing: Crossing | None = None
    pooled: Pooled | None = None
    runs: int = 0
    failed: int = 0
    _round: int = 0
    _replicas: dict[int, int] = field(default_factory=dict)
    _before: Bracket | None = None

    def next(self) -> list[Wanted]:
        """The runs of the next round; none where there is a verdict."""
        if self.verdict is not None:
            return []
        self._round += 1
        if self._round == 1:
            return self._wanted(self.asked.first_places())
        places = self._chosen()
        left = self.asked.form.most_runs - self.runs
        if self.verdict is None and left <= 0:
            self.verdict = self._given_up()
        return [] if self.verdict is not None else self._wanted(places[:left])

    def learn(self, wanted: Wanted, reading: Reading | None) -> None:
        """What a run answered; None where it failed or its answer is no number."""
        self.runs += 1
        if reading is None or not math.isfinite(reading.value):
            self.failed += 1
            return
        self.places[wanted.place.share] = wanted.place
        self.readings.setdefault(wanted.place.share, []).append(reading)

    def _wanted(self, places: list[Place]) -> list[Wanted]:
        found = []
        for place in places:
            number = self._replicas.get(place.lattice, 0) + 1
            self._replicas[place.lattice] = number
            found.append(Wanted(place, number, self._round))
        return found

    def _chosen(self) -> list[Place]:
        """Places to look at next, one for each run; or the verdict is set."""
        many = self.failed >= max(_MOST_FAILED, self.asked.form.points // 2)
        if len(self.readings) < 2 or (many and self.failed > _FAILED_SHARE * self.runs):
            self.verdict = Verdict(RUNS_FAILED)
            return []
        form = self.asked.form
        self.pooled = pooled(self.readings, self.asked.threshold, form.noise)
        known = self.pooled.known
        if known is None:
            return self._again(self._nearest(2), 2)
        if self.pooled.exact:
            return self._exact(known)
        return self._noisy(known, self.pooled.single, self.pooled.freedom)

    def _nearest(self, count: int) -> list[float]:
        """The places whose answers are nearest to the threshold, on both sides where there are."""
        off = {
            at: sum(each.value for each in those) / len(those) - self.asked.threshold
            for at, those in self.readings.items()
        }
        order = sorted(off, key=lambda at: abs(off[at]))
        other = [at for at in order if (off[at] >= 0.0) != (off[order[0]] >= 0.0)]
        return ([order[0], other[0]] if other else order)[:count]

    def _again(self, shares: list[float], count: int) -> list[Place]:
        return [self.places[share] for share in shares for _ in range(count)]

    def _exact(self, known: Known) -> list[Place]:
        """Answers without errors: close the bracket."""
        found = brackets(known.at, known.value)
        if not found:
            self.verdict = Verdict(NO_CROSSING, above=bool(known.value[0] >= 0.0))
            return []
        low, high = found[0].low, found[-1].high
        middle = found[len(found) // 2]
        self._note(low, high)
        if self._narrow(low, high):
            self.verdict = Verdict(
                FOUND,
                self._values(low, high),
                self.asked.value(middle.foretold),
                self._rising(bool(known.value[-1] >= known.value[0])),
                certain=True,
            )
            return []
        if len(found) > 1:
            self.verdict = Verdict(
                SEVERAL, brackets=tuple(self._values(each.low, each.high) for each in found)
            )
            return []
        (bracket,) = found
        count = self.asked.form.at_once
        shares = division(bracket, self._before, self._target(bracket.foretold), count)
        self._before = bracket
        new = self._new(shares) or self._new([0.5 * (bracket.low + bracket.high)])
        if not new and not self._neighbours(bracket):  # what lies between them was run, and failed
            self.verdict = Verdict(RUNS_FAILED)
        elif not new:
            self.verdict = Verdict(
                FOUND,
                self._values(low, high),
                self.asked.value(bracket.foretold),
                self._rising(bool(known.value[-1] >= 0.0)),
                certain=True,
            )
        return new

    def _neighbours(self, bracket: Bracket) -> bool:
        """Whether no place lies between the two ends."""
        ends = {self.asked.place(bracket.low).lattice, self.asked.place(bracket.high).lattice}
        return self.asked.place(0.5 * (bracket.low + bracket.high)).lattice in ends

    def _new(self, shares: list[float]) -> list[Place]:
        """Places nothing is known of yet, each once."""
        places = {place.lattice: place for place in map(self.asked.place, shares)}
        return [place for place in places.values() if place.lattice not in self._replicas]

    def _noisy(self, known: Known, single: float, freedom: int) -> list[Place]:
        """Answers with errors: the crossing's probability decides where to look."""
        deviations = known.deviations
        ends = _changes(known, 1.0)
        if len(ends) > 1:
            if freedom < _COMPARED and len(_changes(known, _DOUBT)) < 2:
                return self._again(self._nearest(2), 2)
            low, high = float(ends[0][0]), float(ends[-1][1])
            if self._narrow(low, high):
                self.verdict = Verdict(
                    FOUND,
                    self._values(low, high),
                    self.asked.value(0.5 * (low + high)),
                    self._rising(bool(known.value[-1] > known.value[0])),
                )
            else:
                told = tuple(self._values(float(a), float(b)) for a, b in ends)
                self.verdict = Verdict(SEVERAL, brackets=told)
            return []
        clear = np.flatnonzero(np.abs(deviations) >= CLEAR)
        sides = np.sign(deviations[clear])
        if not sides.size or sides[0] == sides[-1]:
            return self._unclear(known)
        rising = bool(sides[-1] > 0.0)
        self.crossing = crossing(known, rising)
        low, high = self.crossing.interval(self.asked.form.confidence)
        self._note(low, high)
        best = self.crossing.quantile(0.5)
        if not self._narrow(low, high):
            return self._closer(self.crossing, single)
        if freedom < _COMPARED:
            low, high = self._doubted(known, rising)
            if not self._narrow(low, high):
                return self._again(self._nearest(2), 2)
            self._note(low, high)
        self.verdict = Verdict(
            FOUND, self._values(low, high), self.asked.value(best), self._rising(rising)
        )
        return []

    def _doubted(self, known: Known, rising: bool) -> tuple[float, float]:
        """The interval if the answers' own errors were far too small, as no seeds have shown yet.

        Where it is as narrow as asked all the same it is told instead, and costs no run.
        """
        larger = Known(known.at, known.value, _DOUBT * known.error)
        return crossing(larger, rising).interval(self.asked.form.confidence)

    def _unclear(self, known: Known) -> list[Place]:
        """All on one side as far as can be told: more seeds where it is not clear."""
        deviations = np.abs(known.deviations)
        unclear = [k for k in np.argsort(deviations, kind="stable") if deviations[k] < CLEAR]
        if not unclear:
            self.verdict = Verdict(NO_CROSSING, above=bool(known.value[0] > 0.0))
            return []
        few = unclear[: max(2, self.asked.form.at_once)]
        runs = [len(self.readings[float(known.at[k])]) for k in few]
        each = [min(_MOST_REPLICAS, max(1, count)) for count in runs]
        return [
            self.places[float(known.at[k])]
            for k, count in zip(few, each, strict=True)
            for _ in range(count)
        ]

    def _closer(self, found: Crossing, single: float) -> list[Place]:
        """Places within the interval, more seeds each where the noise of one hides the side.

        Every other round goes by the interval's length, not by where the crossing is likely: an
        interval may be wide by a little doubt far away.
        """
        form = self.asked.form
        low, high = found.interval(form.confidence)
        spread = found.spread_at(found.quantile(0.5))
        hidden = single > spread
        replicas = 1
        if hidden:
            ratio = (high - low) / max(self._target(0.5 * (low + high)), 1e-300)
            near = sum(len(r) for at, r in self.readings.items() if self._beside(at, low, high))
            lacking = max(1.0, near) * (min(ratio, 1e3) ** 2 - 1.0)
            most = max(1, math.ceil(0.5 * lacking / form.at_once))
            wanted = round((single / max(spread, 1e-300)) ** 2) if spread > 0.0 else _MOST_REPLICAS
            replicas = min(_MOST_REPLICAS, most, max(1, wanted))
        count = form.at_once
        if hidden:
            shift = _van_der_corput(self._round)
            parts = [0.05 + 0.9 * (k + shift) / count for k in range(count)]
        else:
            parts = [(k + 1) / (count + 1) for k in range(count)]
        by_length = hidden and self._round % 2 == 0
        places = []
        for part in parts:
            share = low + part * (high - low) if by_length else found.quantile(part)
            if hidden:
                beside = min(self.readings, key=lambda at: abs(at - share))
                if abs(beside - share) < _SAME * (high - low):
                    share = beside
            places.append(self.places.get(share) or self.asked.place(share))
        return [place for place in places for _ in range(replicas)]

    def _beside(self, at: float, low: float, high: float) -> bool:
        return low - (high - low) <= at <= high + (high - low)

    def _target(self, share: float) -> float:
        """The width to reach, as a part of the range."""
        value = self.asked.value(share)
        width = self.asked.resolution.at(value)
        if self.asked.whole:
            width = max(width, 1.0)
        if self.asked.log:
            ratio = abs(math.log(self.asked.range.last / self.asked.range.first))
            return width / max(abs(value), 1e-300) / ratio
        return width / abs(self.asked.range.last - self.asked.range.first)

    def _narrow(self, low: float, high: float) -> bool:
        """Whether an interval is as narrow as asked."""
        a, b = self._values(low, high)
        wanted = self.asked.resolution.at(0.5 * (a + b))
        return b - a <= max(wanted, 1.0 if self.asked.whole else 0.0) * (1.0 + 1e-9)

    def _values(self, low: float, high: float) -> tuple[float, float]:
        """In SI, ascending."""
        a, b = sorted((self.asked.value(low), self.asked.value(high)))
        return a, b

    def _rising(self, along: bool) -> bool:
        """Whether the answer rises with the value, from whether it does along the range."""
        return along == (self.asked.range.last > self.asked.range.first)

    def _note(self, low: float, high: float) -> None:
        self.intervals.append((self._round - 1, self.runs, *self._values(low, high)))

    def _given_up(self) -> Verdict:
        """The runs allowed were too few."""
        noted = [each for each in self.intervals if each[0] == self._round - 1]
        if not noted:
            return Verdict(TOO_NOISY)
        low, high = noted[-1][2:]
        wanted = self.asked.resolution.at(0.5 * (low + high))
        ratio = min((high - low) / max(wanted, 1e-300), 1e6)
        middle = 0.5 * (low + high)
        rising = True
        if self.crossing is not None:
            middle = self.asked.value(self.crossing.quantile(0.5))
        if self.pooled is not None and self.pooled.known is not None:
            value = self.pooled.known.value
            rising = self._rising(bool(value[-1] > value[0]))
        exact = self.pooled is not None and self.pooled.exact
        needed = self.runs + math.ceil(math.log2(ratio)) if exact else self.runs * ratio**2
        return Verdict(NOT_REACHED, (low, high), middle, rising, exact, needed=math.ceil(needed))


def _changes(known: Known, doubt: float) -> list[tuple[float, float]]:
    """Neighbours that surely lie on different sides, of those that surely lie on one.

    doubt : factor by which errors may be larger than they are said to be
    """
    surely = np.flatnonzero(np.abs(known.deviations) >= doubt * _SURELY)
    at, side = known.at[surely], np.sign(known.value[surely])
    return [(float(at[k]), float(at[k + 1])) for k in np.flatnonzero(np.diff(side) != 0.0)]


def _van_der_corput(number: int) -> float:
    """Numbers of (0, 1) that fill it evenly however many are taken (base 2)."""
    found, part = 0.0, 0.5
    while number:
        found += part * (number & 1)
        number, part = number >> 1, 0.5 * part
    return found
