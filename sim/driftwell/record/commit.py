"""A file appears whole or not at all: written aside, forced to disk, renamed.

The rename is the only commit point. What stood under the name before stays until then.
"""

from __future__ import annotations

import os
from contextlib import suppress
from pathlib import Path

PART = ".part"
"""Ending of a file that is being written; readers pass it by."""


def commit(path: Path, image: bytes) -> None:
    """Put `image` under the name `path`, in one instant that a crash leaves before or after.

    Raises OSError (disk full, no permission); nothing half-written is left then.
    """
    part = path.with_name(path.name + PART)
    try:
        _write(part, image)
        part.replace(path)
    except BaseException:
        with suppress(OSError):
            part.unlink()
        raise
    force_folder(path.parent)


def remove_parts(folder: Path) -> None:
    """Remove what a process that was killed had begun to write."""
    for part in folder.rglob(f"*{PART}"):
        part.unlink(missing_ok=True)


def force_folder(folder: Path) -> None:
    """Force the names in `folder` to disk, so that a rename outlives a loss of power."""
    handle = os.open(folder, os.O_RDONLY)
    try:
        os.fsync(handle)
    finally:
        os.close(handle)


def _write(path: Path, image: bytes) -> None:
    """Write and force to disk; plain writes, so that a full disk is a plain error."""
    handle = os.open(path, os.O_WRONLY | os.O_CREAT | os.O_TRUNC, 0o666)
    try:
        rest = memoryview(image)
        while rest:
            rest = rest[os.write(handle, rest) :]
        os.fsync(handle)
    finally:
        os.close(handle)
