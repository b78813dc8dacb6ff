"""What driftwell keeps between runs: compiled code and solved fields."""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import suppress
from pathlib import Path

from driftwell.cli.doctor.line import FAULT, NOTE, OK, Line

CACHE = "DRIFTWELL_CACHE"
_ELSEWHERE = f"Name a folder that can be written: export {CACHE}=/some/folder"


def compiled_code() -> Iterator[Line]:
    """Where compiled code is kept, how much, and whether there is some of this version."""
    try:
        from driftwell.kernels.compiled import kept_in
    except OSError as fault:  # neither the user's nor a temporary folder
        yield Line(
            FAULT,
            "compiled code",
            f"no folder for it can be written ({fault.strerror or fault})",
            _ELSEWHERE,
        )
        return
    from driftwell.scenario.room import in_words

    folder = kept_in()
    files, size = _content(folder)
    here = f"{folder}: {in_words(size)} in {files} files"
    if not writable(folder):
        yield Line(NOTE, "compiled code", f"{here}; nothing more can be written there", _ELSEWHERE)
    elif not folder.name.startswith("kernels-"):
        yield Line(
            NOTE,
            "compiled code",
            f"{folder}: for this one process only, every run compiles anew",
            _ELSEWHERE,
        )
        with suppress(OSError):
            folder.rmdir()
    elif folder.parent == Path(tempfile.gettempdir()) / f"driftwell-{os.getuid()}":
        yield Line(
            NOTE,
            "compiled code",
            f"{here}: a folder that may be emptied, as the user's cache folder cannot be written",
            _ELSEWHERE,
        )
    elif not files:
        yield Line(
            NOTE,
            "compiled code",
            f"{folder}: none of this version yet, the first run compiles for up to a minute",
        )
    else:
        yield Line(OK, "compiled code", here)


def solved_fields() -> Iterator[Line]:
    """Where solved fields are kept, and how much."""
    from driftwell.scenario.room import in_words
    from driftwell.solved.store import PLACE, store_folder

    folder = store_folder()
    files, size = _content(folder)
    if not writable(folder):
        yield Line(
            NOTE,
            "solved fields",
            f"{folder} cannot be written: fields are solved again in every run",
            f"Name a folder that can be written: export {PLACE}=/some/folder",
        )
        return
    told = f"{in_words(size)} in {files} files" if files else "none yet"
    yield Line(OK, "solved fields", f"{folder}: {told}")


def writable(folder: Path) -> bool:
    """Whether a file can be made in the folder, or in that in which it would be made."""
    for place in (folder, *folder.parents):
        if place.exists():
            try:
                with tempfile.TemporaryFile(dir=place) as probe:
                    probe.write(b"0" * 4096)
            except OSError:
                return False
            return True
    return False


def _content(folder: Path) -> tuple[int, int]:
    """Number and bytes of the files in a folder; 0 where there is none."""
    files = size = 0
    with suppress(OSError):
        for each in folder.rglob("*"):
            with suppress(OSError):  # removed meanwhile
                if each.is_file():
                    files, size = files + 1, size + each.stat().st_size
    return files, size
