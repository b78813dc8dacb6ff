"""A cluster of worker processes on this machine, in a process of its own.

As a script: starts it, prints its address as a line of JSON, and ends it when its input ends.
"""

from __future__ import annotations

import json
import os
import signal
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any

ROOT = Path(__file__).parent.parent.parent


class SmallCluster:
    """A cluster that runs.

    address : of its scheduler
    """

    def __init__(self, process: subprocess.Popen[str]) -> None:
        self._process = process
        assert process.stdout is not None
        self.address: str = json.loads(process.stdout.readline())["address"]

    def workers(self) -> list[int]:
        """The worker processes that live; the scheduler is in the process above them."""
        return [pid for pid in _below(self._process.pid) if b"spawn_main" in _command(pid)]

    def kill_scheduler(self) -> None:
        """End the process of the scheduler there and then; its workers end by themselves."""
        self._process.kill()
        self._process.wait()


@contextmanager
def cluster(workers: int = 2, **security: Any) -> Iterator[SmallCluster]:
    """A cluster of so many workers of one thread each; dead ones are replaced."""
    process = subprocess.Popen(
        [sys.executable, __file__, str(workers), json.dumps(security)],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.DEVNULL,
        text=True,
        cwd=ROOT,
        env={**os.environ, "PYTHONPATH": os.pathsep.join(sys.path)},
    )
    try:
        yield SmallCluster(process)
    finally:
        below = _below(process.pid)
        with suppress(subprocess.TimeoutExpired):
            process.communicate(timeout=20.0)
        process.kill()
        for pid in below:
            with suppress(OSError):
                os.kill(pid, signal.SIGKILL)
        process.wait()


def _below(pid: int) -> list[int]:
    """The children of a process that live."""
    found = []
    for place in Path("/proc").glob("[0-9]*"):
        try:
            state, parent = (place / "stat").read_text().rsplit(")", 1)[1].split()[:2]
        except OSError:
            continue
        if int(parent) == pid and state != "Z":
            found.append(int(place.name))
    return found


def _command(pid: int) -> bytes:
    try:
        return Path(f"/proc/{pid}/cmdline").read_bytes()
    except OSError:
        return b""


def main(workers: int, security: dict[str, Any]) -> None:
    """Be the cluster."""
    import dask
    from distributed import LocalCluster, Security

    # at its default a worker that takes seconds to be replaced is never replaced
    dask.config.set({"distributed.deploy.lost-worker-timeout": "1h"})
    options: dict[str, Any] = {}
    if security:
        options["security"] = Security(require_encryption=True, **security)
        options["protocol"] = "tls://"
    with LocalCluster(
        n_workers=workers,
        threads_per_worker=1,
        processes=True,
        dashboard_address=None,
        worker_dashboard_address=None,
        **options,
    ) as made:
        print(json.dumps({"address": made.scheduler_address}), flush=True)
        sys.stdin.read()


if __name__ == "__main__":
    main(int(sys.argv[1]), json.loads(sys.argv[2]))
