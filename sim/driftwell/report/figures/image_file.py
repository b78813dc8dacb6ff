"""A figure as the bytes of a file: PNG, SVG or PDF, the same each time, with where it is from.

The provenance stands in the file's own metadata, not in the picture: title, program, digest of the
scenario, and the command that makes the run again.
"""

from __future__ import annotations

import shlex
from io import BytesIO
from pathlib import Path

from matplotlib.figure import Figure

from driftwell.errors import RecordError
from driftwell.record.commit import commit
from driftwell.record.reader import Run
from driftwell.report.figures.options import FigureError, listed
from driftwell.report.figures.print_style import print_style

FORMATS = ("png", "svg", "pdf")


def format_of(path: Path, given: str | None = None) -> str:
    """The format of a file: the one that was asked for, else that of its ending."""
    found = given or path.suffix.lower().lstrip(".")
    if found not in FORMATS:
        raise FigureError(
            f"{path}: a figure is written as {listed(FORMATS)}. Give the file one of these "
            "endings, or say which with --as."
        )
    return found


def image(figure: Figure, form: str, run: Run, what: str) -> bytes:
    """The figure as a file of a format, with its provenance."""
    made = BytesIO()
    with print_style():
        figure.savefig(made, format=form, metadata=_METADATA[form](run, what))
    return made.getvalue()


def write_image(path: Path, made: bytes) -> None:
    """Put the file in its place, whole or not at all; raises RecordError where that cannot be."""
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        commit(path, made)
    except OSError as fault:
        raise RecordError(
            f"{path}: cannot be written ({fault.strerror or fault}). Make space, give access, or "
            "name another file with -o."
        ) from fault


def provenance(run: Run, what: str) -> str:
    """Where a figure is from, in a line."""
    header = run.header
    parts = [
        f"{what} of a run by driftwell {header.driftwell_version}",
        f"scenario digest {header.digest}" if header.digest else "",
        f"seed {header.seed}",
        f"made again by: {_command(header.command)}" if header.command else "",
    ]
    return _plain("; ".join(part for part in parts if part))


def _command(command: str) -> str:
    """The command without the folders of whoever gave it: figures are published."""
    try:
        words = shlex.split(command)
    except ValueError:
        return "driftwell run"
    named = [Path(word).name if "/" in word and "=" not in word else word for word in words]
    return shlex.join(named)


def _plain(text: str) -> str:
    """Text without what metadata may not hold."""
    return "".join(letter if letter.isprintable() else " " for letter in text)


def _png(run: Run, what: str) -> dict[str, str | None]:
    return {
        "Title": _plain(run.header.title),
        "Description": provenance(run, what),
        "Software": f"driftwell {run.header.driftwell_version}",
    }


def _svg(run: Run, what: str) -> dict[str, str | None]:
    return {
        "Title": _plain(run.header.title),
        "Description": provenance(run, what),
        "Creator": f"driftwell {run.header.driftwell_version}",
        "Date": None,
    }


def _pdf(run: Run, what: str) -> dict[str, str | None]:
    return {
        "Title": _plain(run.header.title),
        "Subject": provenance(run, what),
        "Creator": f"driftwell {run.header.driftwell_version}",
        "CreationDate": None,
    }


_METADATA = {"png": _png, "svg": _svg, "pdf": _pdf}
