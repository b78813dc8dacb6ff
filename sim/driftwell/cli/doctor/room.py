"""Free memory, and free space where records and temporary files go."""

from __future__ import annotations

import tempfile
from collections.abc import Iterator
from pathlib import Path

from driftwell.cli.doctor.kept import writable
from driftwell.cli.doctor.line import FAULT, NOTE, OK, Line

LEAST_DISK, LITTLE_DISK = 10_000_000, 1_000_000_000
"""Bytes: below the first the record of a small run does not fit; below the second a long one's."""
LITTLE_MEMORY = 2_000_000_000
"""Bytes; some 2e6 charges."""


def memory() -> Iterator[Line]:
    """Free memory against what the program itself takes."""
    from driftwell.scenario.room import BASE, free_memory, in_words

    free = free_memory()
    if free is None:
        yield Line(NOTE, "memory", "the system does not say how much is free")
    elif free < BASE:
        yield Line(
            FAULT,
            "memory",
            f"{in_words(free)} free, and the smallest run takes {in_words(BASE)}",
            "End other programs, or ask the batch system for more.",
        )
    elif free < LITTLE_MEMORY:
        yield Line(
            NOTE,
            "memory",
            f"{in_words(free)} free: enough for small runs",
            "`driftwell estimate FILE` says what a run takes.",
        )
    else:
        yield Line(OK, "memory", f"{in_words(free)} free")


def disk() -> Iterator[Line]:
    """Free space here and for temporary files."""
    try:
        here = Path.cwd()
    except OSError:
        yield Line(NOTE, "this folder", "is gone", "cd to another one")
    else:
        yield _place("this folder", here, "Go elsewhere, or name a folder elsewhere with -o.")
    try:
        temporary = Path(tempfile.gettempdir())
    except OSError as fault:
        yield Line(
            FAULT,
            "temporary files",
            f"no folder for them can be written ({fault.strerror or fault})",
            "Name one that can: export TMPDIR=/some/folder",
        )
    else:
        yield _place(
            "temporary files", temporary, "Name a folder elsewhere: export TMPDIR=/some/folder"
        )


def _place(what: str, folder: Path, remedy: str) -> Line:
    """One folder: whether a file can be made there, and how much is free."""
    from driftwell.scenario.room import free_space, in_words

    if not writable(folder):
        return Line(NOTE, what, f"{folder} cannot be written", remedy)
    free = free_space(folder)
    if free is None:
        return Line(NOTE, what, f"{folder}: the system does not say how much is free")
    told = f"{folder}: {in_words(free)} free"
    if free < LEAST_DISK:
        return Line(FAULT, what, f"{told}, too little for the record of any run", remedy)
    if free < LITTLE_DISK:
        return Line(NOTE, what, f"{told}, little for the record of a long run", remedy)
    return Line(OK, what, told)
