"""Ctrl-C and the signals that ask a program to end, taken as the wish to stop a run.

A thread of its own listens for them, so that it answers at once, whatever compiled code is doing.
The first one lets the run end in order; the second ends the process there and then, which harms
nothing that was recorded. While nothing is recorded yet, the first one does so.
"""

from __future__ import annotations

import os
import signal
import threading
from collections.abc import Callable, Iterator
from contextlib import contextmanager

from driftwell.cli.terminal.printing import tell

SIGNALS = (signal.SIGINT, signal.SIGTERM, signal.SIGHUP)


class StopWish:
    """Whether the user wants the run to stop; see :meth:`listening`.

    keeping : whether there is a record by now
    ending : done before the process is ended at once
    wanted : set by the first signal
    """

    def __init__(
        self, keeping: Callable[[], bool], ending: Callable[[], None] = lambda: None
    ) -> None:
        self._keeping = keeping
        self._ending = ending
        self.wanted = False

    @contextmanager
    def listening(self) -> Iterator[None]:
        """While inside, signals that were not to be ignored are wishes to stop."""
        source, sink = os.pipe()
        os.set_blocking(sink, False)
        wakeup = signal.set_wakeup_fd(sink, warn_on_full_buffer=False)
        before = {
            each: signal.signal(each, lambda *_: None)
            for each in SIGNALS
            if signal.getsignal(each) is not signal.SIG_IGN
        }
        listener = threading.Thread(target=self._listen, args=(source,), daemon=True)
        listener.start()
        try:
            yield
        finally:
            for each, handler in before.items():
                signal.signal(each, handler)
            signal.set_wakeup_fd(wakeup)
            os.close(sink)  # the listener reads the end, and returns
            listener.join()
            os.close(source)

    def _listen(self, source: int) -> None:
        while heard := os.read(source, 1):
            number = heard[0]
            if number not in SIGNALS:
                continue
            keeping = self._keeping()
            if self.wanted or not keeping:
                tell(f"\n{_LAST_WORDS[keeping]}")
                self._ending()
                os._exit(128 + number)
            self.wanted = True
            tell("\nStopping after the steps under way; once more to end at once.")


_LAST_WORDS = {
    False: "Ended before the first step; nothing is recorded.",
    True: "Ended at once; what was sealed before is kept.",
}
