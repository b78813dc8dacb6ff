"""Studies on the disk, the command that sweeps them, and the processes it starts."""

from __future__ import annotations

import os
import subprocess
import time
from pathlib import Path

from tests.cli.small_runs import SMALL, started

STUDY = """\
title = "How many ions"
scenario = "small.toml"
replicas = {replicas}
set = [{settings}]

[[vary]]
key = "cloud.load.count"
values = [{counts}]
"""
PATIENCE = 240.0
"""s, for a first compilation on a busy machine."""


def study(
    folder: Path,
    counts: str = "2, 4, 8",
    replicas: int = 1,
    settings: tuple[str, ...] = ("duration=2 us",),
    name: str = "ions.toml",
) -> Path:
    """A study of the small scenario, and the scenario beside it."""
    (folder / "small.toml").write_text(SMALL)
    texts = ", ".join(f"'{each}'" for each in settings)
    path = folder / name
    path.write_text(STUDY.format(counts=counts, replicas=replicas, settings=texts))
    return path


def sweeping(path: Path, folder: Path, *more: str) -> subprocess.Popen[str]:
    """The command, started."""
    return started("sweep", path, "-o", folder, "--workers", "2", "--no-pictures", *more)


def children(pid: int) -> list[int]:
    """The workers a process has started and that live."""
    found = []
    for place in Path("/proc").glob("[0-9]*"):
        try:
            state, parent = (place / "stat").read_text().rsplit(")", 1)[1].split()[:2]
            command = (place / "cmdline").read_bytes()
        except OSError:
            continue
        if int(parent) == pid and state != "Z" and b"driftwell.study.worker" in command:
            found.append(int(place.name))
    return found


def waited_for(process: subprocess.Popen[str], count: int, folder: Path, pattern: str) -> None:
    """Until so many files of this pattern are in the sweep's folder."""
    end = time.monotonic() + PATIENCE
    while len(list(folder.glob(pattern))) < count:
        assert process.poll() is None, process.communicate()
        assert time.monotonic() < end, pattern
        time.sleep(0.02)


def gone(pids: list[int], patience: float = 30.0) -> bool:
    """Whether the processes end within the time."""
    end = time.monotonic() + patience
    while any(_lives(pid) for pid in pids):
        if time.monotonic() >= end:
            return False
        time.sleep(0.02)
    return True


def _lives(pid: int) -> bool:
    try:
        os.kill(pid, 0)
        return Path(f"/proc/{pid}/stat").read_text().rsplit(")", 1)[1].split()[0] != "Z"
    except OSError:
        return False
