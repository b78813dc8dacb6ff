"""What is installed only on demand: libraries of extras, and programs outside Python."""

from __future__ import annotations

import shutil
from collections.abc import Iterator
from importlib.metadata import PackageNotFoundError, version

from driftwell.cli.doctor.line import NOTE, OK, Line
from driftwell.cli.doctor.versions import comparable, suits, wanted

USES = {
    "cluster": "sweeps on several machines",
    "mesh": "electrodes from STL files",
    "parquet": "tables as Parquet",
    "vtk": "exports as VTK",
    "xarray": "tables of a run with named dimensions, in Python",
}
"""What each extra is for; those for work on driftwell itself are left out."""
ENCODER = "ffmpeg"


def extras() -> Iterator[Line]:
    """Every extra: there, or what it would bring and how to get it; none without comparing."""
    if not comparable():
        return
    for extra, use in USES.items():
        install = f"Only if you want that: pip install 'driftwell[{extra}]'"
        bounds = wanted(extra)
        if not bounds:
            yield Line(
                NOTE,
                f"[{extra}]",
                f"not known to the driftwell that is installed: {use}",
                f"Only if you want that, in driftwell's own folder: pip install '.[{extra}]'",
            )
            continue
        lacking: list[str] = []
        there: list[str] = []
        for name, bound in bounds.items():
            try:
                found = version(name)
            except PackageNotFoundError:
                lacking.append(f"{name} is not installed")
                continue
            (there if suits(found, bound) else lacking).append(f"{name} {found}")
        if lacking:
            yield Line(NOTE, f"[{extra}]", f"{', '.join(lacking)}: no {use}", install)
        else:
            yield Line(OK, f"[{extra}]", f"{', '.join(there)}: {use}")


def programs() -> Iterator[Line]:
    """Programs that driftwell starts where they are there."""
    found = shutil.which(ENCODER)
    if found:
        yield Line(OK, ENCODER, f"{found}: movies as MP4")
    else:
        yield Line(
            NOTE,
            ENCODER,
            "not found: `driftwell movie` writes GIF, not MP4",
            "Only if you want that: install it with the system's packages, such as apt install "
            "ffmpeg",
        )
