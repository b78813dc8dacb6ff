"""Questions about what passed a detector in a stretch of time."""

from __future__ import annotations

from typing import Self

from driftwell.answers.evidence import Evidence
from driftwell.answers.form import detector_named
from driftwell.answers.kinds.fractions import DetectorQuestion
from driftwell.answers.passages import Passages, alike, first_of_each, passages, within
from driftwell.forms import NonNegative, Time, checked, key, refuse
from driftwell.forms.spelling import spelled

Window = tuple[float, float]


class PassageQuestion(DetectorQuestion):
    """Base of questions about the charges that pass a detector, each at its first passage."""

    over: tuple[NonNegative[Time], NonNegative[Time]] | None = key(
        "take what passes in this stretch of time; left out: in the whole run", default=None
    )

    @checked
    def _ordered(self) -> Self:
        if self.over is not None:
            in_order(self.over)
        return self

    def times(self) -> dict[str, float]:
        return {} if self.over is None else {"over": self.over[1]}

    def first_passages(self, evidence: Evidence, least: int) -> Passages:
        """First passages within the window, all counting alike, in the order of their ids."""
        detector_named(evidence, self.of)
        found = first_of_each(passages(evidence, self.of, self.clouds(evidence)))
        return alike(within(found, self.over, evidence), least, self.of)

    def when(self) -> str:
        """The window in words, with a blank before it."""
        return "" if self.over is None else f" {window_in_words(self.over)}"


class CurrentQuestion(DetectorQuestion):
    """Base of questions about the current through a detector: a current needs a stretch of time."""

    over: tuple[NonNegative[Time], NonNegative[Time]] = key(
        "the stretch of time over which the current is averaged", example=["1 us", "2 us"]
    )

    @checked
    def _ordered(self) -> Self:
        in_order(self.over)
        return self

    def times(self) -> dict[str, float]:
        return {"over": self.over[1]}

    def all_passages(self, evidence: Evidence) -> Passages:
        """Every passage within the window, in the order of time."""
        return within(passages(evidence, self.of, self.clouds(evidence)), self.over, evidence)


def in_order(window: Window) -> None:
    """Refuses a stretch of time that does not end later than it begins."""
    if window[1] <= window[0]:
        raise refuse("`over` must end later than it begins")


def window_in_words(window: Window) -> str:
    """``from 1 us to 2 us``."""
    return f"from {spelled(window[0], 's')} to {spelled(window[1], 's')}"
