"""A file for HDF5 to write to that never fails in its eyes: what goes wrong is told afterwards.

Where the disk is full the HDF5 library cannot close its file any more, and takes the process down
at its end. So a write that fails is noted, it and all later ones are dropped, and whoever made the
file asks :meth:`KeptError.tell_all` before the file is taken for whole.
"""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import Any

import h5py


class KeptError(io.RawIOBase):
    """A new file, open for reading and writing; the first failure of the disk is kept."""

    def __init__(self, path: Path) -> None:
        self._file = path.open("w+b", buffering=0)
        self._fault: OSError | None = None

    def tell_all(self) -> None:
        """Raise the OSError that the disk gave, if it gave one."""
        if self._fault is not None:
            raise self._fault

    def write(self, data: Any) -> int:
        """Write all of it, or drop it."""
        rest = memoryview(data).cast("B")
        size = len(rest)
        try:
            while rest and self._fault is None:
                rest = rest[self._file.write(rest) or 0 :]
        except OSError as fault:
            self._fault = fault
        return size

    def readinto(self, buffer: Any) -> int:
        """Read as much as there is; what was dropped reads as zeros."""
        view = memoryview(buffer).cast("B")
        got = self._file.readinto(view) or 0
        if self._fault is not None:
            view[got:] = bytes(len(view) - got)
            return len(view)
        return got

    def seek(self, offset: int, whence: int = io.SEEK_SET) -> int:
        """Go to a place."""
        return self._file.seek(offset, whence)

    def tell(self) -> int:
        """Where it stands."""
        return self._file.tell()

    def truncate(self, size: int | None = None) -> int:
        """Make it so long."""
        try:
            return self._file.truncate(size)
        except OSError as fault:
            self._fault = self._fault or fault
            return size or 0

    def seekable(self) -> bool:
        """It is."""
        return True

    def readable(self) -> bool:
        """It is."""
        return True

    def writable(self) -> bool:
        """It is."""
        return True

    def close(self) -> None:
        """Close the file."""
        self._file.close()
        super().close()


@contextmanager
def hdf5_file(path: Path) -> Iterator[tuple[Any, KeptError]]:
    """A new HDF5 file, and where to ask for failures; raises OSError at the end for the last."""
    with KeptError(path) as kept:
        with h5py.File(kept, "w") as file:
            yield file, kept
        kept.tell_all()
