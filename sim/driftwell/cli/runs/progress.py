"""What a run shows while it goes on: a bar in a terminal, a line now and then in a log."""

from __future__ import annotations

import os
import sys
import time
from contextlib import suppress
from datetime import datetime
from typing import Any

from tqdm import tqdm

from driftwell.cli.terminal.clock import by_the_clock
from driftwell.cli.terminal.compiling import tell_of_compiling
from driftwell.cli.terminal.printing import is_terminal, tell
from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.coulomb.form import Coulomb
from driftwell.coulomb.summation import pairs_in_one_sum
from driftwell.counted import PAIRS_PER_SECOND
from driftwell.forms import spelled
from driftwell.particles.state import Particles
from driftwell.run import Progress
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice

_REDRAWN = 0.2
"""s, between two drawings of the bar."""
_FIRST_LINE, _LONGEST_WAIT = 5.0, 600.0
"""s, until the first line of a log, and the longest time between two."""
_LONG = 2 * 3600.0
"""s, from which on a user should know before waiting."""
_USUAL = 80
_ROOMY = 120
"""Characters of a terminal from which on the bar's text is written out."""


class ProgressDisplay:
    """Shows progress on stderr, and passes the wish to stop on to the run."""

    def __init__(self, wish: StopWish, threads: int, coulomb: Coulomb) -> None:
        self._wish = wish
        self._coulomb = coulomb
        self._pairs_per_second = threads * PAIRS_PER_SECOND
        self._bar: Any = None
        self._began = 0.0
        self._next: float | None = None

    def compiles(self) -> None:
        """Say why nothing moves yet."""
        tell_of_compiling()

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Say what the run will do, and why in such steps."""
        tell(steps_in_words(choice, plan, particles))
        pairs = pairs_in_one_sum(self._coulomb, len(particles))
        sums = pairs * plan.total_steps / self._pairs_per_second
        if sums > _LONG:
            tell(
                f"That many pairs in that many steps take at least {_in_days(sums)}. Fewer charges "
                "of more weight each, or a longer step, take less."
            )

    def told(self, sentence: str) -> None:
        """Say it above the bar, or between the lines of a log."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.clear()
        tell(sentence)

    def goes_on(self, progress: Progress) -> bool:
        """Show how far the run is; False once a stop was asked for."""
        if self._next is None:
            self._next = self._first()
        elapsed = time.monotonic() - self._began
        if elapsed >= self._next:
            if self._bar is None:
                self._next = elapsed + min(2.0 * elapsed, _LONGEST_WAIT)
                tell(f"{datetime.now():%H:%M:%S}  {told(progress, elapsed)}")
            else:
                self._next = elapsed + _REDRAWN
                self._draw(progress, elapsed)
        return not self._wish.wanted

    def ends(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.close()
            self._bar = None

    def _first(self) -> float:
        """Begin with a bar or without; the time until something is shown, s."""
        self._began = time.monotonic()
        if not is_terminal(sys.stderr):
            return _FIRST_LINE
        tqdm.monitor_interval = 0  # no thread of its own: it would write beside us
        with suppress(OSError):
            self._bar = tqdm(
                total=1.0,
                bar_format="{percentage:3.0f} %|{bar}| {desc}",
                leave=False,
                ncols=_columns(),
                file=sys.stderr,
            )
        return 0.0

    def _draw(self, progress: Progress, elapsed: float) -> None:
        bar = self._bar
        try:
            bar.ncols = _columns()
            bar.n = progress.time / progress.duration
            bar.set_description_str(told(progress, elapsed, short=bar.ncols < _ROOMY), refresh=True)
        except OSError:  # the terminal is gone; the run is not
            self._bar = None


def steps_in_words(choice: StepChoice, plan: Schedule, particles: Particles) -> str:
    """How many charges are moved in how many steps, and why in such."""
    return (
        f"{_counted(len(particles), 'charge')}, {_counted(plan.total_steps, 'step')} of at "
        f"most {spelled(choice.step, 's', 4)}: {choice.because}"
    )


def told(progress: Progress, elapsed: float, short: bool = False) -> str:
    """How far a run is: time, charges, energy residual, and when it will be done.

    elapsed : s by the clock since its first step
    """
    reached, whole = spelled(progress.time, "s", 3), spelled(progress.duration, "s", 4)
    done = _done(progress, elapsed)
    if short:
        return (
            f"{reached} of {whole}, {progress.alive}/{progress.born} left, "
            f"residual {abs(progress.energy_residual):.0e}{done}"
        )
    return (
        f"t = {reached} of {whole}, {progress.alive} of {progress.born} charges left, "
        f"energy residual {progress.energy_residual:.1e}{done}"
    )


def _done(progress: Progress, elapsed: float) -> str:
    """When the run will be done at the present pace."""
    if progress.steps <= 0 or elapsed <= 0.0:
        return ""
    rest = elapsed * (progress.all_steps - progress.steps) / progress.steps
    return f", done {by_the_clock(rest)}"


def _columns() -> int:
    """Characters of the terminal's lines now; 80 where it does not say."""
    try:
        return os.get_terminal_size(sys.stderr.fileno()).columns or _USUAL
    except (OSError, ValueError):
        return _USUAL


def _in_days(seconds: float) -> str:
    """A long time in words."""
    for unit, length in (("years", 3.156e7), ("days", 86400.0)):
        if seconds >= 2.0 * length:
            return f"{float(f'{seconds / length:.1e}'):g} {unit}"
    return f"{seconds / 3600.0:.2g} hours"


def _counted(number: int, noun: str) -> str:
    return f"{number} {noun}{'s' * (number != 1)}"
