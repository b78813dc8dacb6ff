"""Charges at times in the open standard openPMD 1.1.0, one HDF5 file.

Each snapshot, or each record of the tracked charges, is one iteration, counted from 0. A particle
species of the standard is a cloud here; its own names stand in the attributes `cloud` and
`species`. Momenta are those of one real particle, m u: the component holds the proper velocity u
and its unitSI is the mass, so that nothing is rounded.

References
----------
A. Huebl et al., openPMD 1.1.0, doi:10.5281/zenodo.1167843 (DOI from memory); its text as the
official validator checks it.
"""

from __future__ import annotations

import re
from datetime import datetime
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import CloudFacts, Snapshot
from driftwell.errors import RecordError
from driftwell.exports.kept_error import hdf5_file
from driftwell.exports.names import STATES
from driftwell.exports.states import cloud_by_index, states
from driftwell.exports.wanted import Wanted
from driftwell.exports.written import whole
from driftwell.record.reader import Run

ENDING = ".h5"
AXES = ("x", "y", "z")


def write(run: Run, wanted: Wanted, path: Path) -> None:
    """One file; of the snapshots, or of the trajectory."""
    what = wanted.what or STATES[:1]
    if len(what) != 1 or what[0] not in STATES:
        raise RecordError(
            f"openpmd: what is {', '.join(what)}; needs snapshots or trajectory, one of the two."
        )
    clouds = cloud_by_index(run)
    groups = group_names([cloud.name for cloud in clouds.values()])
    named = dict(zip(clouds, groups, strict=True))
    with whole(path) as part, hdf5_file(part) as (file, kept):
        _put_root(file, run, wanted)
        for number, state in enumerate(states(run, what[0], wanted.times)):
            kept.tell_all()
            iteration = file.create_group(f"data/{number}")
            iteration.attrs["time"] = np.float64(state.time)
            iteration.attrs["dt"] = np.float64(run.header.step)
            iteration.attrs["timeUnitSI"] = np.float64(1.0)
            particles = iteration.create_group("particles")
            for index, cloud in clouds.items():
                own = state.cloud == index
                if own.any():
                    _put_cloud(particles.create_group(named[index]), cloud, state, own)


def group_names(names: list[str]) -> list[str]:
    """Names of letters, digits and underscores, all different, in the place of any others."""
    made: list[str] = []
    for name in names:
        plain = re.sub(r"\W", "_", name, flags=re.ASCII)
        free, number = plain, 2
        while free in made:
            free, number = f"{plain}_{number}", number + 1
        made.append(free)
    return made


def _text(text: str) -> np.bytes_:
    """A text as the standard wants it, of fixed length and ASCII."""
    return np.bytes_(text.encode("ascii", "backslashreplace") or b" ")


def _put_root(file: Any, run: Run, wanted: Wanted) -> None:
    header = run.header
    texts = {
        "openPMD": "1.1.0",
        "basePath": "/data/%T/",
        "particlesPath": "particles/",
        "iterationEncoding": "groupBased",
        "iterationFormat": "/data/%T/",
        "software": "driftwell",
        "softwareVersion": header.driftwell_version,
        "softwareDependencies": f"Python {header.python_version}; numpy {header.numpy_version}; "
        f"numba {header.numba_version}; h5py {header.h5py_version}",
        "date": _date(header.created),
        "comment": f"{header.title} (scenario digest {header.digest or 'not noted'})",
    }
    if wanted.author:
        texts["author"] = wanted.author
    for name, text in texts.items():
        file.attrs[name] = _text(text)
    file.attrs["openPMDextension"] = np.uint32(0)


def _date(created: str) -> str:
    """``2026-01-31 12:00:00 +0000`` of the time in the record."""
    try:
        when = datetime.fromisoformat(created)
    except ValueError:
        return "1970-01-01 00:00:00 +0000"
    return when.strftime("%Y-%m-%d %H:%M:%S %z") if when.tzinfo else f"{when:%F %T} +0000"


def _put_cloud(group: Any, cloud: CloudFacts, state: Snapshot, own: NDArray[np.bool_]) -> None:
    """The records of one cloud's charges."""
    group.attrs["cloud"] = _text(cloud.name)
    group.attrs["species"] = _text(cloud.species)
    position, mass = state.position[own], state.mass[own]
    count = len(position)
    same_mass = bool((mass == mass[0]).all())
    momentum = state.velocity[own] if same_mass else state.velocity[own] * mass[:, None]
    _put_vector(group, "position", (1,), position)
    _put_vector(group, "positionOffset", (1,), np.zeros((count, 3)))
    _put_vector(group, "momentum", (1, 1, -1), momentum, float(mass[0]) if same_mass else 1.0)
    for name, dimension, values in (
        ("mass", (0, 1), mass),
        ("charge", (0, 0, 1, 1), state.charge[own]),
        ("weighting", (), state.weight[own]),
        ("id", (), state.id[own].astype(np.uint64)),
    ):
        component = _put_component(group, name, values)
        _put_record(component, dimension, name)
    _put_patch(group.create_group("particlePatches"), position)


def _put_vector(
    group: Any,
    name: str,
    dimension: tuple[int, ...],
    values: NDArray[np.float64],
    unit: float = 1.0,
) -> None:
    record = group.create_group(name)
    for k, axis in enumerate(AXES):
        _put_component(record, axis, values[:, k], unit)
    _put_record(record, dimension, name)


def _put_component(group: Any, name: str, values: NDArray[Any], unit: float = 1.0) -> Any:
    """One component: an array, or where all its values are the same one value and a shape."""
    if name != "id" and (values == values[0]).all():
        component = group.create_group(name)
        component.attrs["value"] = values[0]
        component.attrs["shape"] = np.array(values.shape, np.uint64)
    else:
        component = group.create_dataset(name, data=np.ascontiguousarray(values))
    component.attrs["unitSI"] = np.float64(unit)
    return component


def _put_record(record: Any, dimension: tuple[int, ...], name: str) -> None:
    """Length, mass, time, current, temperature, amount and light, to these powers."""
    whole_dimension = np.zeros(7)
    whole_dimension[: len(dimension)] = dimension
    record.attrs["unitDimension"] = whole_dimension
    record.attrs["timeOffset"] = np.float64(0.0)
    weighted = name in ("weighting", "momentum", "mass", "charge")
    record.attrs["macroWeighted"] = np.uint32(name == "weighting")
    record.attrs["weightingPower"] = np.float64(weighted)


def _put_patch(group: Any, position: NDArray[np.float64]) -> None:
    """All charges as one patch, and the box they lie in."""
    for name, number in (("numParticles", len(position)), ("numParticlesOffset", 0)):
        group.create_dataset(name, data=np.array([number], np.uint64)).attrs["unitSI"] = 1.0
    low, high = position.min(axis=0), position.max(axis=0)
    extent = np.nextafter(high - low, np.inf)
    extent = np.where(low + extent > high, extent, 2.0 * np.spacing(np.abs(high)) + extent)
    for name, values in (("offset", low), ("extent", extent)):
        record = group.create_group(name)
        for k, axis in enumerate(AXES):
            record.create_dataset(axis, data=values[k : k + 1]).attrs["unitSI"] = np.float64(1.0)
        record.attrs["unitDimension"] = np.array([1.0, 0, 0, 0, 0, 0, 0])
