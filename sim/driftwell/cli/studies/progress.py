"""What a sweep shows while it goes on: a bar in a terminal, a line now and then in a log."""

from __future__ import annotations

import sys
import time
from contextlib import suppress
from datetime import datetime
from typing import Any

from tqdm import tqdm

from driftwell.cli.terminal.clock import by_the_clock
from driftwell.cli.terminal.printing import is_terminal, tell
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.kernels.compiled import kept_in
from driftwell.study.cores import Sharing
from driftwell.study.progress import Failure, SweepProgress

_REDRAWN = 0.2
"""s, between two drawings of the bar."""
_FIRST_LINE, _LONGEST_WAIT = 5.0, 600.0
"""s, until the first line of a log, and the longest time between two."""
_MOST_TOLD = 5
"""Failures that are told one by one; the summary has them all."""


class SweepDisplay:
    """Shows progress on stderr, and passes the wish to stop on to the sweep.

    stop_after : s by the clock from now on, after which it asks to stop; None for never
    """

    def __init__(self, wish: StopWish, stop_after: float | None = None) -> None:
        self._wish = wish
        self._until = None if stop_after is None else time.monotonic() + stop_after
        self._bar: Any = None
        self._began = time.monotonic()
        self._next = _FIRST_LINE
        self._failures = 0

    def begins(self, sharing: Sharing, progress: SweepProgress) -> None:
        """Say how the cores are shared, and why nothing may move yet."""
        tell(sharing.because)
        if not any(kept_in().rglob("*.nbi")):
            tell("compiling for this machine, once for each version: up to a minute")
        self._began = time.monotonic()
        if not is_terminal(sys.stderr):
            self._next = _FIRST_LINE
            return
        self._next = 0.0
        tqdm.monitor_interval = 0  # no thread of its own: it would write beside us
        with suppress(OSError):
            self._bar = tqdm(
                total=progress.cases,
                bar_format="{percentage:3.0f} %|{bar}| {desc}",
                leave=False,
                dynamic_ncols=True,
                file=sys.stderr,
            )

    def told(self, sentence: str) -> None:
        """Say it above the bar, or between the lines of a log."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.clear()
        tell(sentence)

    def failed(self, failure: Failure) -> None:
        """Say the first few as they come."""
        if failure.before:
            return
        self._failures += 1
        if self._failures <= _MOST_TOLD:
            self.told(f"run {failure.number} failed: {failure.reason}")
        elif self._failures == _MOST_TOLD + 1:
            self.told("more failed; the summary will say which and why")

    def goes_on(self, progress: SweepProgress) -> bool:
        """Show how far the sweep is; False once a stop was asked for, or the time is over."""
        elapsed = time.monotonic() - self._began
        if elapsed >= self._next:
            if self._bar is None:
                self._next = elapsed + min(2.0 * elapsed, _LONGEST_WAIT)
                tell(f"{datetime.now():%H:%M:%S}  {sweep_told(progress)}")
            else:
                self._next = elapsed + _REDRAWN
                self._draw(progress)
        over = self._until is not None and time.monotonic() >= self._until
        return not self._wish.wanted and not over

    def ends(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.close()
            self._bar = None

    def _draw(self, progress: SweepProgress) -> None:
        bar = self._bar
        try:
            bar.n = progress.cases - progress.left
            bar.set_description_str(sweep_told(progress), refresh=True)
        except OSError:  # the terminal is gone; the sweep is not
            self._bar = None


def sweep_told(progress: SweepProgress) -> str:
    """How far a sweep is, and when it will be done at the present pace."""
    parts = [f"{progress.there + progress.computed} of {progress.cases} runs done"]
    if progress.failed:
        parts.append(f"{progress.failed} failed")
    if progress.under_way:
        parts.append(f"{progress.under_way} under way")
    if progress.computed and progress.left:
        rest = progress.seconds * progress.left / progress.computed
        parts.append(f"done {by_the_clock(rest)}")
    return ", ".join(parts)
