"""All formats by name, and the export of a run into one of them."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from importlib import import_module
from pathlib import Path
from typing import Protocol

from driftwell.errors import RecordError
from driftwell.exports.names import FORMATS
from driftwell.exports.wanted import Wanted, names_of, times_of
from driftwell.exports.written import refuse_existing
from driftwell.record.reader import Run


class Write(Protocol):
    """Write a run, or what is wanted of it, to a path; raises RecordError."""

    def __call__(self, run: Run, wanted: Wanted, path: Path) -> None: ...


@dataclass(frozen=True, slots=True)
class Format:
    """A format: the module that writes it, and how the usual name of what it leaves ends."""

    module: str
    ending: str


_TABLE = {
    "openpmd": Format("driftwell.exports.openpmd", "-openpmd.h5"),
    "csv": Format("driftwell.exports.csv", "-csv"),
    "parquet": Format("driftwell.exports.parquet", "-parquet"),
    "vtk": Format("driftwell.exports.vtk", "-vtk"),
}


def export(
    run: Run,
    format_name: str,
    path: str | Path | None = None,
    what: Sequence[str] = (),
    times: Sequence[str | float] = (),
    author: str = "",
) -> Path:
    """Write a run in an open format; returns the file or folder it is in.

    Parameters
    ----------
    run : an open run
    format_name : openpmd, csv, parquet or vtk
    path : where; left out: the run's name with the format's, in the working folder
    what : parts of the run, see :data:`driftwell.exports.names.TABLES`; left out: what is usual
    times : ``start``, ``end``, ``"20 us"``, ``"10 us..20 us"`` or seconds; left out: all
    author : who answers for the data

    Raises
    ------
    RecordError
        There is something at the path, the disk refuses, a library is missing, or nothing was
        recorded at the times.
    """
    if format_name not in _TABLE:
        raise RecordError(f'"{format_name}": no such format; needs one of {", ".join(FORMATS)}.')
    form = _TABLE[format_name]
    wanted = Wanted(names_of(what), times_of(run, times), author)
    place = Path(f"{run.folder.resolve().name}{form.ending}" if path is None else path)
    refuse_existing(place)
    write: Write = import_module(form.module).write
    write(run, wanted, place)
    return place
