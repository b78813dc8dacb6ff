"""What a run started from Python shows: a bar in a terminal or a notebook; what it was told."""

from __future__ import annotations

import signal
import sys
import threading
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from importlib.util import find_spec
from typing import Any

from driftwell.forms import spelled
from driftwell.particles.state import Particles
from driftwell.run import Progress
from driftwell.stepping.schedule import Schedule
from driftwell.stepping.step_choice import StepChoice


class Watcher:
    """Observes a run: draws the bar, keeps what is told, passes the wish to stop on.

    told_so_far : sentences, in order
    """

    def __init__(self, wish: Interrupt, shown: bool) -> None:
        self.told_so_far: list[str] = []
        self._wish = wish
        self._shown = shown
        self._bar: Any = None

    def begins(self, choice: StepChoice, plan: Schedule, particles: Particles) -> None:
        """Keep what will be done, and why in such steps; show the bar."""
        self.told(
            f"{len(particles)} charges, {plan.total_steps} steps of at most "
            f"{spelled(choice.step, 's', 4)}: {choice.because}"
        )
        if self._shown:
            self._bar = new_bar(1.0)

    def told(self, sentence: str) -> None:
        """Keep it."""
        self.told_so_far.append(sentence)

    def goes_on(self, progress: Progress) -> bool:
        """Show how far the run is; False once a stop was asked for."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.n = round(progress.time / progress.duration, 4)
                self._bar.set_description_str(_words(progress), refresh=True)
        return not self._wish.wanted

    def ends(self) -> None:
        """Take the bar away."""
        if self._bar is not None:
            with suppress(OSError):
                self._bar.close()
            self._bar = None


def _words(progress: Progress) -> str:
    return (
        f"t = {spelled(progress.time, 's', 3)} of {spelled(progress.duration, 's', 4)}, "
        f"{progress.alive} of {progress.born} left"
    )


def new_bar(total: float) -> Any:
    """A bar up to `total`, where somebody can see it."""
    form = {"bar_format": "{percentage:3.0f} %|{bar}| {desc}", "total": total, "leave": False}
    if in_notebook() and find_spec("ipywidgets") is not None:
        from tqdm.auto import tqdm

        return tqdm(**form)
    from tqdm import tqdm as plain

    return plain(**form, file=sys.stderr, disable=None)


def in_notebook() -> bool:
    """Whether this is the process of a notebook."""
    shell = sys.modules.get("IPython")
    running = None if shell is None else shell.get_ipython()
    return running is not None and type(running).__name__ == "ZMQInteractiveShell"


class Interrupt:
    """Ctrl-C while a run goes on: the first lets it end in order, the second ends it at once.

    Only the main thread hears signals; elsewhere a run is not interrupted.
    """

    def __init__(self, shown: bool = True) -> None:
        self.wanted = False
        self._shown = shown

    @contextmanager
    def listening(self) -> Iterator[None]:
        """While inside, the first Ctrl-C is kept in `wanted`."""
        if threading.current_thread() is not threading.main_thread():
            yield
            return
        before = signal.getsignal(signal.SIGINT)
        if before is signal.SIG_IGN:
            yield
            return
        signal.signal(signal.SIGINT, self._heard)
        try:
            yield
        finally:
            signal.signal(signal.SIGINT, before)

    def _heard(self, number: int, frame: object) -> None:
        if self.wanted:
            raise KeyboardInterrupt
        self.wanted = True
        if self._shown:
            with suppress(OSError, AttributeError):
                sys.stderr.write(
                    "\nStopping after the steps under way; once more to end at once.\n"
                )
