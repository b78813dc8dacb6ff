"""Where solved fields are kept: one HDF5 file for each digest of geometry and settings.

A second run, every case of a sweep over voltages, and every worker of a batch read what the first
has solved. A file appears whole or not at all, and has checksums throughout; who wants to solve the
same holds a lock meanwhile, and whoever comes later waits for it and then reads. Locks are the
system's own: they end with their process, however it ends.
"""

from __future__ import annotations

import fcntl
import os
import time
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import Any

import h5py
import numpy as np
from numpy.typing import NDArray

from driftwell.kernels.compiled import kept_in
from driftwell.record.commit import commit
from driftwell.record.file_image import file_in_memory, image_of, put_array

Arrays = dict[str, NDArray[Any]]
Told = Callable[[str], None]

PLACE = "DRIFTWELL_FIELDS"
"""Environment variable that names the folder, such as one shared by the machines of a cluster."""
FORMAT = 1
_SEASON = 90 * 24 * 3600.0
"""s; files not used for so long are removed."""


def store_folder() -> Path:
    """Where solved fields are kept: as the environment says, or in the user's cache folder."""
    named = os.environ.get(PLACE)
    return Path(named).absolute() if named else kept_in().parent / "fields"


class Store:
    """The files of a folder; a folder that cannot be written keeps nothing, and says so once."""

    def __init__(self, folder: Path, told: Told) -> None:
        self._folder, self._told = folder, told

    def found(self, digest: str) -> Arrays | None:
        """What is kept under a digest; None where nothing is, or it is damaged."""
        path = self._path(digest)
        try:
            with h5py.File(path, "r") as file:
                if int(file.attrs["format"]) != FORMAT or file.attrs["digest"] != digest:
                    return None
                arrays: Arrays = {}
                file.visititems(lambda name, item: _taken(arrays, name, item))
        except FileNotFoundError:
            return None
        except (OSError, RuntimeError, KeyError, ValueError) as fault:  # as h5py fails
            self._told(f"{path}: damaged ({fault}); the field is solved again.")
            return None
        with suppress(OSError):
            os.utime(path)
        return arrays

    def keeps(self, digest: str) -> bool:
        """Whether there is a file under a digest, damaged or not."""
        return self._path(digest).is_file()

    def keep(self, digest: str, arrays: Mapping[str, NDArray[Any]]) -> None:
        """Keep arrays under a digest; where that fails the user is told, and goes on without."""
        with file_in_memory() as file:
            file.attrs["format"] = FORMAT
            file.attrs["digest"] = digest
            for name, array in arrays.items():
                put_array(file, name, array)
            image = image_of(file)
        try:
            commit(self._path(digest), image)
            self._prune(self._path(digest))
        except OSError as fault:
            self._told(f"{self._folder}: the solved field is not kept ({fault.strerror}).")

    @contextmanager
    def alone(self, digest: str) -> Iterator[None]:
        """Be the only one who works on a digest; waits for another."""
        try:
            self._folder.mkdir(parents=True, exist_ok=True)
            handle = os.open(self._folder / f"{digest}.lock", os.O_RDWR | os.O_CREAT, 0o666)
        except OSError:  # nothing can be kept there, so nobody can be in the way
            yield
            return
        try:
            try:
                fcntl.flock(handle, fcntl.LOCK_EX | fcntl.LOCK_NB)
            except BlockingIOError:
                self._told("Another process solves this field: waiting for it.")
                fcntl.flock(handle, fcntl.LOCK_EX)
            except OSError:  # a file system without locks: two may solve the same, to the same end
                pass
            yield
        finally:
            os.close(handle)

    def _path(self, digest: str) -> Path:
        return self._folder / f"{digest}.h5"

    def _prune(self, keep: Path) -> None:
        now = time.time()
        for path in self._folder.glob("*.h5"):
            with suppress(OSError):
                if path != keep and now - path.stat().st_mtime > _SEASON:
                    path.unlink()


def _taken(arrays: Arrays, name: str, item: Any) -> None:
    if isinstance(item, h5py.Dataset):
        arrays[name] = np.asarray(item[()])
