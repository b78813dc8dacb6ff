"""One thing that is to be said of a run: what was found, against what, and what to change."""

from __future__ import annotations

from dataclasses import dataclass

from driftwell.forms import spelled


@dataclass(frozen=True, slots=True)
class Finding:
    """A figure of a run that is beyond its limit.

    name : of the judgement, in a few words
    words : what was found, with figure and limit, in a sentence without its full stop
    figure, limit : the number found, and the one it is compared with, in the same unit
    remedy : what to change, with keys and values, in whole sentences
    grave : whether the answers as a whole are in doubt
    told : whether the run has said it before its end
    """

    name: str
    words: str
    figure: float
    limit: float
    remedy: str
    grave: bool = False
    told: bool = False

    @property
    def sentence(self) -> str:
        """Words and remedy together."""
        return f"{self.words}. {self.remedy}"


def plain(number: float) -> str:
    """A pure number to two digits, written out up to a million."""
    return f"{float(f'{number:.1e}'):g}"


def about(value: float, unit: str) -> str:
    """A quantity to two digits, in words."""
    return spelled(float(f"{value:.1e}"), unit)
