"""Tells when machine code has to be made: nothing else moves until it is there.

Numba announces each compilation; code loaded from its cache is not announced.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import Any

from numba.core import event


class _First(event.Listener):
    def __init__(self, tell: Callable[[], None]) -> None:
        self._tell = tell
        self._told = False

    def on_start(self, event: Any) -> None:
        if not self._told:
            self._told = True
            self._tell()

    def on_end(self, event: Any) -> None:
        """The end of one of many compilations says nothing."""


@contextmanager
def first_compilation(tell: Callable[[], None]) -> Iterator[None]:
    """While inside, call `tell` once, when the first kernel has to be compiled."""
    with event.install_listener("numba:compile", _First(tell)):
        yield
