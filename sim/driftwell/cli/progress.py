"""What a run shows while it goes on: a bar in a terminal, a line now and then in a log."""

from __future__ import annotations

import signal
import sys
import time
from collections.abc import Iterator
from contextlib import contextmanager
from datetime import datetime, timedelta
from types import FrameType
from typing import Any

from tqdm import tqdm

from driftwell.particles.state import Particles
from driftwell.run import Progress
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice

_FIRST_LINE, _LONGEST_WAIT = 5.0, 600.0


class ProgressDisplay:
    """Shows progress on stderr, and passes the wish to stop on to the run."""

    def __init__(self) -> None:
        self._stop = False
        self._bar: Any = None
        self._began = time.monotonic()
        self._next_line = _FIRST_LINE

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Say what the run will do, and why in such steps."""
        count = len(particles)
        print(
            f"{count} charges, {plan.total_steps} steps of at most {choice.step:.4g} s, "
            f"by {choice.because}",
            file=sys.stderr,
        )
        if sys.stderr.isatty():
            self._bar = tqdm(
                total=1.0,
                bar_format="{percentage:5.1f} %|{bar}| {elapsed}, {remaining} left {postfix}",
                leave=False,
                file=sys.stderr,
            )
        self._began = time.monotonic()

    def goes_on(self, progress: Progress) -> bool:
        """Show how far the run is; False once a stop was asked for."""
        share = progress.time / progress.duration
        state = (
            f"t = {progress.time:.4g} of {progress.duration:.4g} s, "
            f"{progress.alive} of {progress.born} charges, "
            f"energy residual {progress.energy_residual:.1e}"
        )
        if self._bar is not None:
            self._bar.set_postfix_str(state, refresh=False)
            self._bar.update(share - self._bar.n)
        elapsed = time.monotonic() - self._began
        if self._bar is None and elapsed >= self._next_line:
            self._next_line = elapsed + min(2.0 * elapsed, _LONGEST_WAIT)
            print(f"{state}{_finish(elapsed, share)}", file=sys.stderr)
        return not self._stop

    def ends(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            self._bar.close()
            self._bar = None

    @contextmanager
    def listening(self) -> Iterator[None]:
        """While inside, Ctrl-C and SIGTERM ask the run to stop; a second one ends it at once."""

        def stop(number: int, frame: FrameType | None) -> None:
            if self._stop:
                raise KeyboardInterrupt
            self._stop = True
            print("\nStopping after the present steps; once more to end at once.", file=sys.stderr)

        before = {each: signal.signal(each, stop) for each in (signal.SIGINT, signal.SIGTERM)}
        try:
            yield
        finally:
            for each, handler in before.items():
                signal.signal(each, handler)


def _finish(elapsed: float, share: float) -> str:
    """When the run will be done at the present pace."""
    if share <= 0.0:
        return ""
    done = datetime.now() + timedelta(seconds=elapsed * (1.0 - share) / share)
    return f", done about {done:%H:%M:%S}" if elapsed < 3600 else f", done about {done:%a %H:%M}"
