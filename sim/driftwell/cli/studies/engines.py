"""What computes a study's runs, here or on a cluster, from its first use until it is killed."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TYPE_CHECKING

from driftwell.cli.terminal.stop_wish import StopWish
from driftwell.study.cores import Load, Sharing, shared, usable_cores
from driftwell.study.engine import Engine
from driftwell.study.pool import Pool
from driftwell.study.sweep_folder import RUNS, taken

if TYPE_CHECKING:
    from driftwell.study.cluster import Cluster


class Engines:
    """Pools of workers here, or the workers of a cluster.

    cluster : None where all is computed here; workers : how many are asked for, None: as it suits
    """

    def __init__(self, cluster: Cluster | None, workers: int | None) -> None:
        self.cluster = cluster
        self._workers = workers
        self._pools: list[Pool] = []

    def engine(self, workers: int, threads: int) -> Engine:
        """A new engine; whoever asks for it closes it."""
        if self.cluster is not None:
            return self.cluster.engine(self._workers)
        self._pools.append(Pool.of_runs(workers, threads))
        return self._pools[-1]

    def sharing(self, load: Load, workers: int | None, threads: int | None) -> Sharing:
        """How the cores are shared."""
        if self.cluster is not None:
            return self.cluster.sharing(load, workers, threads)
        return shared(load, usable_cores(), workers, threads)

    def kill(self) -> None:
        """End all workers here at once."""
        for pool in self._pools:
            pool.kill()

    @contextmanager
    def working_in(self, folder: Path, study: str, scenario: str, wish: StopWish) -> Iterator[bool]:
        """The folder taken, signals heeded, and the connection closed in the end.

        Gives whether the folder held other texts before.
        """
        try:
            with taken(folder, study, scenario) as changed, wish.listening():
                if self.cluster is not None:
                    self.cluster.fits(folder / RUNS)
                yield changed
        finally:
            if self.cluster is not None:
                self.cluster.close()
