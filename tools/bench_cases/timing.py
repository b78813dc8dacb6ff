"""Times taken in turn, and whole runs of driftwell between two looks at the clock."""

from __future__ import annotations

import statistics
import tempfile
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any


def side_by_side(
    ours: Callable[[], float], theirs: Callable[[], float], repeats: int
) -> dict[str, float]:
    """Median seconds of both, and the median ratio theirs/ours of pairs taken in turn."""
    ours(), theirs()
    return summarised([(ours(), theirs()) for _ in range(repeats)])


def summarised(pairs: list[tuple[float, float]]) -> dict[str, float]:
    """Medians of pairs of seconds, driftwell's and the reference's."""
    ratios = [second / first for first, second in pairs]
    return {
        "ratio": statistics.median(ratios),
        "ratio_least": min(ratios),
        "ratio_most": max(ratios),
        "seconds": statistics.median(first for first, _ in pairs),
        "reference_seconds": statistics.median(second for _, second in pairs),
    }


def best_of(repeats: int, once: Callable[[], float]) -> float:
    """The least seconds of several."""
    return min(once() for _ in range(repeats))


class Watch:
    """An observer that notes when the first step is about to be taken: all is compiled by then."""

    began = 0.0

    def begins(self, choice: Any, plan: Any, particles: Any) -> None:
        self.began = 0.0

    def told(self, sentence: str) -> None:
        """Nothing to say."""

    def goes_on(self, progress: Any) -> bool:
        self.began = self.began or time.perf_counter()
        return True


def driftwell_run(text: str, threads: int = 1) -> tuple[float, Any]:
    """Seconds of a whole run (stepping, ledger, record, answers), and its record."""
    from driftwell.record.reader import open_run
    from driftwell.run import run
    from driftwell.scenario.read import read_scenario

    with tempfile.TemporaryDirectory() as folder:
        file = Path(folder) / "bench.toml"
        file.write_text(text)
        watch = Watch()
        run(read_scenario(file), Path(folder) / "run", watch, threads)
        seconds = time.perf_counter() - watch.began
        record = open_run(Path(folder) / "run")
        return seconds, record.snapshot(record.end_time)
