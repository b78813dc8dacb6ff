"""One engine for several sweeps: its workers, or its connection, outlive each of them."""

from __future__ import annotations

from collections.abc import Callable

from driftwell.study.engine import Done, Engine, Task


class KeptEngine:
    """An engine that outlives the sweeps it serves."""

    def __init__(self, engine_of: Callable[[int, int], Engine]) -> None:
        self._engine_of = engine_of
        self._engine: Engine | None = None

    def engine(self, workers: int, threads: int) -> Engine:
        """The one engine; the first sweep that needs it says how large it is."""
        if self._engine is None:
            self._engine = self._engine_of(workers, threads)
        return _Lent(self._engine)

    def close(self) -> None:
        """End its workers."""
        if self._engine is not None:
            self._engine.close()


class _Lent:
    """An engine that its borrower cannot close."""

    def __init__(self, engine: Engine) -> None:
        self._engine = engine

    def room(self) -> int:
        """As the engine's."""
        return self._engine.room()

    def submit(self, task: Task) -> None:
        """As the engine's."""
        self._engine.submit(task)

    def next(self, timeout: float) -> Done | None:
        """As the engine's."""
        return self._engine.next(timeout)

    def under_way(self) -> int:
        """As the engine's."""
        return self._engine.under_way()

    def stop(self) -> None:
        """As the engine's."""
        self._engine.stop()

    def close(self) -> None:
        """Nothing: others will use it."""
