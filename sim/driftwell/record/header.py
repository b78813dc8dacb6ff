"""What a run is: its scenario, its parts by name, its programs and its machine."""

from __future__ import annotations

import os
import platform
from collections.abc import Callable
from dataclasses import asdict, dataclass, field, fields
from datetime import UTC, datetime
from hashlib import sha256
from importlib.metadata import version
from typing import Any

import numpy as np

from driftwell._version import __version__
from driftwell.answers.evidence import CloudFacts, TraceRequest
from driftwell.errors import RecordError
from driftwell.kernels.processor import processor
from driftwell.record.file_image import (
    attributes_of,
    put_attributes,
    put_dataset,
    table_rows,
    text_of,
    text_table,
)
from driftwell.record.layout import FORMAT_VERSION, HEADER, dataset


def _version_of(package: str) -> Callable[[], str]:
    return lambda: version(package)


@dataclass(frozen=True, slots=True)
class Header:
    """What a run is; the lower fields are found out where they are not given.

    scenario : text of the scenario file, as given
    settings : ``key=value`` given beside the file
    digest : of the content with settings and files named
    command : the command that makes the same run again
    duration, step : s
    motion, motion_rate : the fastest motion in the fields that a step must follow, and its rate,
        rad/s; "" and 0 where the fields have none, and in records of before
    softening : m
    coulomb_method, coulomb_because : the pair sum the run began with, and why
    coulomb_accuracy : rms relative force error asked of it
    field_error, field_digest : relative rms error of the electrodes' solved field as it was mapped,
        and a digest of its numbers; 0 and "" without electrodes
    images : the conductors that answer to the charges, in words; empty where none do
    images_closest : m from them within which their force stops growing, as it was taken; 0 where
        it does not stop, where conductors are of another kind, and in records of before
    walls : names of what takes charges: the walls, then the electrodes, then processes
    processes : names of what else acts on charges
    cell_axis, cell_length : along which axis all repeats, and after how many m; "" and 0: nothing
    tracked : ids of the charges whose trajectories are kept
    traces : names of the traced coordinates, from :func:`trace_name`
    """

    scenario: str
    title: str
    seed: int
    duration: float
    step: float
    scheme: str
    softening: float
    clouds: tuple[CloudFacts, ...]
    species: tuple[str, ...]
    walls: tuple[str, ...] = ()
    detectors: tuple[str, ...] = ()
    tracked: tuple[int, ...] = ()
    traces: tuple[str, ...] = ()
    settings: tuple[str, ...] = ()
    digest: str = ""
    command: str = ""
    threads: int = 1
    coulomb_method: str = "direct"
    coulomb_because: str = ""
    coulomb_accuracy: float = 1e-4
    field_error: float = 0.0
    field_digest: str = ""
    images: str = ""
    images_closest: float = 0.0
    processes: tuple[str, ...] = ()
    cell_axis: str = ""
    cell_length: float = 0.0
    motion: str = ""
    motion_rate: float = 0.0
    format_version: int = FORMAT_VERSION
    driftwell_version: str = __version__
    python_version: str = field(default_factory=platform.python_version)
    numpy_version: str = field(default_factory=_version_of("numpy"))
    numba_version: str = field(default_factory=_version_of("numba"))
    h5py_version: str = field(default_factory=_version_of("h5py"))
    processor: str = field(default_factory=processor)
    cores: int = field(default_factory=lambda: os.cpu_count() or 1)
    created: str = field(default_factory=lambda: datetime.now(UTC).isoformat(timespec="seconds"))

    @property
    def scenario_sha256(self) -> str:
        """Digest of the scenario's text."""
        return sha256(self.scenario.encode()).hexdigest()

    @property
    def sizes(self) -> dict[str, int]:
        """Lengths that stay the same over the run, by the layout's words."""
        return {
            "tracked": len(self.tracked),
            "traces": len(self.traces),
            "clouds": len(self.clouds),
            "processes": len(self.processes),
        }


def trace_name(request: TraceRequest) -> str:
    """Name of a traced coordinate: cloud, what of it, axis; not how finely it is sampled."""
    what = "centre" if request.charge is None else f"charge {request.charge}"
    return f"{request.cloud} {what} {'xyz'[request.axis]}"


def put_header(file: Any, header: Header) -> None:
    """Write the header into a file made in memory."""
    put_attributes(file, HEADER, {entry.name: getattr(header, entry.name) for entry in HEADER})
    put_dataset(file, dataset("trajectory/id"), np.array(header.tracked, np.int64))
    clouds = [asdict(cloud) for cloud in header.clouds]
    entry = dataset("clouds")
    columns = {column.name: [cloud[column.name] for cloud in clouds] for column in entry.columns}
    put_dataset(file, entry, text_table(entry, columns))


def header_of(file: Any) -> Header:
    """The header of an open master or segment.

    Raises RecordError where the file is of a newer format, or the header is damaged.
    """
    found = int(file.attrs["format_version"])
    if found > FORMAT_VERSION:
        by = text_of(file.attrs["driftwell_version"])
        raise RecordError(
            f"{file.filename}: written in format {found}, and this driftwell {__version__} reads "
            f"up to {FORMAT_VERSION}; read it with driftwell {by}."
        )
    values = attributes_of(file, (entry for entry in HEADER if entry.since <= found))
    digest = values.pop("scenario_sha256")
    entry = dataset("clouds")
    header = Header(
        clouds=tuple(
            CloudFacts(**row | {"emitted": bool(row.get("emitted", 0))})
            for row in table_rows(entry, file["clouds"][()])
        ),
        tracked=tuple(file["trajectory/id"][()].tolist()),
        **{each.name: values[each.name] for each in fields(Header) if each.name in values},
    )
    if header.scenario_sha256 != digest:
        raise RecordError(
            f"{file.filename}: damaged; the scenario in it does not have the digest noted beside "
            "it. Restore the file from a copy."
        )
    return header
