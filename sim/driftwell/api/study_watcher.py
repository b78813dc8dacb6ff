"""What a study started from Python shows while its runs are computed."""

from __future__ import annotations

from contextlib import suppress
from typing import Any

from driftwell.api.progress import Interrupt, new_bar
from driftwell.study.cores import Sharing
from driftwell.study.limit_search import Search
from driftwell.study.limit_words import progress_told
from driftwell.study.progress import Failure, SweepProgress


class StudyWatcher:
    """Observes sweeps and searches: a bar for each round, and the wish to stop passed on.

    Every failure is in the result; nothing but the bar is shown.
    """

    def __init__(self, wish: Interrupt, shown: bool) -> None:
        self._wish = wish
        self._shown = shown
        self._bar: Any = None
        self._words = ""

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        """Show the bar."""
        self.ends()
        if self._shown:
            self._bar = new_bar(progress.cases)

    def looks(self, search: Search, wanted: int) -> None:
        """A round of a search begins."""
        self._words = progress_told(search, wanted)

    def told(self, sentence: str) -> None:
        """Nothing to show besides the bar."""

    def failed(self, failure: Failure) -> None:
        """Shown with the result."""

    def goes_on(self, progress: SweepProgress) -> bool:
        """Show how far the runs are; False once a stop was asked for."""
        if self._bar is not None:
            done = progress.there + progress.computed + progress.failed
            words = self._words or f"{done} of {progress.cases} runs"
            with suppress(OSError):
                self._bar.n = done
                self._bar.set_description_str(words, refresh=True)
        return not self._wish.wanted

    def ends(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.close()
            self._bar = None
