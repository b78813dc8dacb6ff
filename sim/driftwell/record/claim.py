"""Taking a folder for one run: no other run in it, and it can be written."""

from __future__ import annotations

import os
from collections.abc import Sequence
from pathlib import Path

from driftwell.errors import RecordError
from driftwell.record.commit import commit, force_folder
from driftwell.record.index import SEGMENTS
from driftwell.record.master import ANSWERS_FILE, MASTER

SCENARIO_FILE = "scenario.toml"
_OWN = (MASTER, ANSWERS_FILE, SEGMENTS)


def holds_run(folder: Path) -> bool:
    """Whether a run was begun in the folder."""
    try:
        return any((folder / name).exists() for name in _OWN)
    except (OSError, ValueError):  # told by :func:`refuse_taken`
        return False


def refuse_taken(folder: Path, scenario: bytes) -> None:
    """See early that a run may be written into `folder`; nothing is changed.

    Raises RecordError where the folder holds a run already, or cannot be made or written.
    """
    if "\0" in str(folder):
        raise unwritable(folder, "its name holds a null character")
    try:
        found = _found(folder, scenario)
        if found:
            raise _taken(folder, found)
        place = folder
        while not place.exists() and place != place.parent:
            place = place.parent
        if not place.is_dir():
            what = "is a file" if place == folder else f"lies below the file {place}"
            raise RecordError(f"{folder}: {what}; a run needs a folder. Name another with -o.")
        writable = os.access(place, os.W_OK | os.X_OK)
    except OSError as fault:
        raise unwritable(folder, fault) from fault
    if not writable:
        raise unwritable(folder, f"no permission to write in {place}")


def _taken(folder: Path, found: Sequence[str]) -> RecordError:
    return RecordError(
        f"{folder}: holds {' and '.join(found)} already; a run needs a folder without another "
        "run in it. Name a new folder with -o, or move the old run away."
    )


def unwritable(folder: Path, fault: OSError | str) -> RecordError:
    """What to say of a folder that refuses."""
    why = getattr(fault, "strerror", None) or fault
    return RecordError(
        f"{folder}: cannot be written ({why}); a run needs a folder it may write to, on a disk "
        "with space. Name another with -o."
    )


def claim(folder: Path, scenario: bytes, master: bytes) -> None:
    """Take the folder for one run: put the scenario and the first master into it.

    Of two runs started at once only one makes the folder of segments. Where the disk refuses,
    nothing is left that would keep the next run out.
    """
    found = _found(folder, scenario)
    try:
        if not found:
            (folder / SEGMENTS).mkdir()
    except FileExistsError:
        found.append(SEGMENTS)
    if found:
        raise _taken(folder, found)
    try:
        commit(folder / SCENARIO_FILE, scenario)
        force_folder(folder.parent)
        commit(folder / MASTER, master)
    except BaseException:
        (folder / SEGMENTS).rmdir()
        raise


def _found(folder: Path, scenario: bytes) -> list[str]:
    """What is in the folder and belongs to another run."""
    found = [name for name in _OWN if (folder / name).exists()]
    text = folder / SCENARIO_FILE
    if text.exists() and text.read_bytes() != scenario:
        found.append(f"another {SCENARIO_FILE}")
    return found
