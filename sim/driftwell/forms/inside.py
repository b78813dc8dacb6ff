"""Paths that a file names: they lead into the file's own folder, and nowhere else."""

from __future__ import annotations

from collections.abc import Collection
from pathlib import Path, PurePosixPath

from driftwell.forms.form import refuse


def check_inside(path: str, endings: Collection[str], key: str, what: str) -> None:
    """Raise the fault of a path that leads elsewhere, or has another ending.

    key : the key that holds it; what : the file that names it, e.g. ``scenario``
    """
    pure = PurePosixPath(path)
    if not path.isprintable() or "\\" in path or ":" in path:
        raise refuse(f"`{key}` must be plain text, its folders separated by /")
    if pure.is_absolute() or ".." in pure.parts:
        raise refuse(
            f"`{key}` must lead to a file in the {what}'s own folder: relative to it and without .."
        )
    if pure.suffix.lower() not in endings:
        raise refuse(f"`{key}` must end in {', '.join(endings)}")


def found_inside(folder: Path, path: str, what: str) -> Path | str:
    """The file that `path` leads to from `folder`, or why it cannot be used."""
    file = (folder / path).resolve()
    if not file.is_relative_to(folder.resolve()):
        return f"leads out of the {what}'s folder; put the file into it"
    if not file.exists():
        return f"there is no such file in the {what}'s folder"
    if not file.is_file():
        return "is not a file"
    return file
