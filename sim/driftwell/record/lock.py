"""A run's folder belongs to one process at a time.

The system's own lock on a file: it is gone with the process that held it, however that ended, so no
lock is ever left behind by a kill. What the file says is for whoever is refused.
"""

from __future__ import annotations

import fcntl
import json
import os
import platform
import time
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from datetime import datetime
from pathlib import Path

from driftwell.errors import BusyError
from driftwell.record.claim import holds_run, unwritable

LOCK = "in-use"
"""Name of the file in the folder, there while a process works in it or after one was killed."""

_LOOKS, _MOMENT = 10, 0.02
"""Looks at the words of a lock that was taken just now, and s between two."""


@contextmanager
def held(folder: Path) -> Iterator[None]:
    """While inside, no other process (and nobody else in this one) can hold the folder.

    Raises BusyError where somebody does, RecordError where the folder cannot be written.
    """
    try:
        handle = _locked(folder / LOCK, folder)
    except OSError as fault:
        raise unwritable(folder, fault) from fault
    try:
        _introduce(handle)
        yield
    finally:
        with suppress(OSError):
            (folder / LOCK).unlink()
        os.close(handle)


@contextmanager
def made_and_held(folder: Path) -> Iterator[None]:
    """A folder, made where it is missing and held; without a run in it it goes again."""
    missing = not folder.exists()
    try:
        folder.mkdir(parents=True, exist_ok=True)
    except OSError as fault:
        raise unwritable(folder, fault) from fault
    try:
        with held(folder):
            yield
    finally:
        if missing and not holds_run(folder):
            with suppress(OSError):
                folder.rmdir()


def _locked(path: Path, folder: Path) -> int:
    """An open handle with the lock on the file that stands under the name."""
    while True:
        handle = os.open(path, os.O_RDWR | os.O_CREAT, 0o666)
        try:
            fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
        except OSError as fault:
            holder = _holder(handle)
            os.close(handle)
            raise BusyError(
                f"{folder}: in use by {holder}. Wait for it, stop it, or name another folder with "
                "-o."
            ) from fault
        with suppress(FileNotFoundError):  # removed by the one before, between our two steps
            if os.path.samestat(os.fstat(handle), path.stat()):
                return handle
        os.close(handle)


def _introduce(handle: int) -> None:
    about = {
        "process": os.getpid(),
        "machine": platform.node(),
        "since": datetime.now().astimezone().isoformat(timespec="seconds"),
    }
    with suppress(OSError):  # a full disk: the lock holds without words
        os.ftruncate(handle, 0)
        os.pwrite(handle, json.dumps(about).encode(), 0)


def _holder(handle: int) -> str:
    """Who holds the lock, given a moment to have introduced itself."""
    for _ in range(_LOOKS):
        with suppress(OSError, ValueError, KeyError, TypeError):
            about = json.loads(os.pread(handle, 4096, 0))
            return f"process {about['process']} on {about['machine']} since {about['since']}"
        time.sleep(_MOMENT)
    return "another process"
