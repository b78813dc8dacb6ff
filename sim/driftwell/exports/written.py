"""What is exported appears whole or not at all, and in the place of nothing that is there."""

from __future__ import annotations

import os
import shutil
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

from driftwell.errors import RecordError
from driftwell.record.commit import PART, force_folder


def refuse_existing(path: Path) -> None:
    """Raise RecordError where something has the name already."""
    if os.path.lexists(path):
        raise RecordError(
            f"{path}: exists already, and nothing was written; name another place with -o, or "
            "move it away."
        )


@contextmanager
def whole(path: Path, folder: bool = False) -> Iterator[Path]:
    """A file, or an empty `folder`, to write into; it gets its name once all is written.

    Raises RecordError where `path` is there already, or the disk refuses; nothing is left then.
    """
    refuse_existing(path)
    part = path.with_name(path.name + PART)
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        _remove(part)
        if folder:
            part.mkdir()
        yield part
        _force(part)
        refuse_existing(path)
        part.rename(path)
        force_folder(path.parent)
    except OSError as fault:
        why = fault.strerror or str(fault)
        raise RecordError(
            f"{path}: cannot be written ({why}); nothing is left of it. Make room, or name "
            "another place with -o."
        ) from fault
    finally:
        with suppress(OSError):
            _remove(part)


def _remove(path: Path) -> None:
    if path.is_dir() and not path.is_symlink():
        shutil.rmtree(path)
    else:
        path.unlink(missing_ok=True)


def _force(path: Path) -> None:
    """Force a file, or all files in a folder, to disk."""
    files = [path] if path.is_file() else [each for each in path.rglob("*") if each.is_file()]
    for each in files:
        handle = os.open(each, os.O_RDONLY)
        try:
            os.fsync(handle)
        finally:
            os.close(handle)
