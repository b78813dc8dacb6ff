"""The folder of pictures, of a run or of a sweep: each file appears whole, and old ones go."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from pathlib import Path

from driftwell.errors import RecordError
from driftwell.record.commit import commit

FOLDER = "pictures"


def hang(folder: Path, images: Mapping[str, bytes], old: Iterable[str], whole: str) -> list[Path]:
    """Write images by name into ``pictures/`` of a folder; returns their files.

    old : names that earlier drawings may have left, taken away where not drawn again
    whole : what is whole all the same, in words, should the folder refuse

    Raises RecordError where the folder cannot be written.
    """
    place = folder / FOLDER
    try:
        place.mkdir(parents=True, exist_ok=True)
        for name in set(old) - set(images):
            (place / name).unlink(missing_ok=True)
        for name, image in images.items():
            commit(place / name, image)
    except OSError as fault:
        raise RecordError(
            f"{place}: the pictures cannot be written ({fault.strerror or fault}); {whole}. Make "
            "space or give access."
        ) from fault
    return [place / name for name in images]
