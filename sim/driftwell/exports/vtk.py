"""Charges for general viewers of three-dimensional data, in files of the library VTK.

A folder: ``snapshots.pvd`` lists a cloud of points for each snapshot, ``trajectory.pvd`` the paths
of the tracked charges, each one line whose points carry their time. All values are float64; units
stand in the arrays' own label for them (UNITS_LABEL).
"""

from __future__ import annotations

import xml.etree.ElementTree as ET
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.answers.evidence import Snapshot
from driftwell.errors import RecordError
from driftwell.exports.extra import missing
from driftwell.exports.names import STATES
from driftwell.exports.states import cloud_by_index, pieces, states, tracked_clouds
from driftwell.exports.wanted import Wanted
from driftwell.exports.written import whole
from driftwell.forms.column_vtk import quiet_library
from driftwell.record.reader import Run

PATHS_BYTES = 128_000_000
"""What one file of paths may take, about: their columns lie in memory together."""

Values = list[tuple[str, NDArray[Any], str]]


def write(run: Run, wanted: Wanted, path: Path) -> None:
    """A folder of files; of the snapshots, of the trajectory, or of both."""
    what = wanted.what or tuple(
        name for name in STATES if name == "snapshots" or run.header.tracked
    )
    if any(name not in STATES for name in what):
        raise RecordError(f"vtk: what is {', '.join(what)}; needs snapshots, trajectory or both.")
    try:
        import vtkmodules.vtkIOXML  # noqa: F401
    except ImportError as fault:
        raise missing("vtk", "vtk", "VTK") from fault
    with whole(path, folder=True) as part:
        if "snapshots" in what:
            _write_snapshots(run, wanted, part)
        if "trajectory" in what:
            _write_paths(run, wanted, part)


def _write_snapshots(run: Run, wanted: Wanted, folder: Path) -> None:
    (folder / "snapshots").mkdir()
    listed = []
    names = _names(run)
    for number, state in enumerate(states(run, "snapshots", wanted.times)):
        name = f"snapshots/{number:06d}.vtp"
        _write_points(folder / name, state, names)
        listed.append((state.time, 0, name))
    _write_collection(folder / "snapshots.pvd", listed)


def _names(run: Run) -> list[str]:
    """Names of the clouds by the number that stands for them."""
    clouds = cloud_by_index(run)
    return [clouds[k].name if k in clouds else "" for k in range(max(clouds, default=-1) + 1)]


def _write_points(path: Path, state: Snapshot, names: Sequence[str]) -> None:
    """A snapshot: a point, and a cell of it, for each charge."""
    values: Values = [
        ("proper velocity", state.velocity, "m/s"),
        ("charge", state.charge, "C"),
        ("mass", state.mass, "kg"),
        ("weight", state.weight, "1"),
        ("id", state.id, "1"),
        ("cloud", state.cloud, "1"),
    ]
    count = len(state.id)
    vertices = (np.arange(count + 1), np.arange(count))
    _write_polydata(path, state.position, values, names, state.time, vertices=vertices)


def _write_paths(run: Run, wanted: Wanted, folder: Path) -> None:
    """The tracked charges' paths, so many in each file as fit into memory."""
    (folder / "trajectory").mkdir()
    time = run.rows("trajectory/time")
    kept = wanted.times.taken(time)
    if not kept.any() or not run.header.tracked:
        raise RecordError(f"{run.folder}: no trajectory was recorded at these times.")
    time = time[kept]
    tracked = np.array(run.header.tracked, dtype=np.int64)
    clouds = np.array([cloud.index for cloud in run.header.clouds])[tracked_clouds(run)]
    block = max(1, PATHS_BYTES // (len(kept) * 48))
    listed = []
    for part, first in enumerate(range(0, len(tracked), block)):
        chosen = slice(first, first + block)
        state = np.concatenate(list(pieces(run, "trajectory/state", np.s_[:, chosen])))[kept]
        name = f"trajectory/{part:06d}.vtp"
        _write_lines(folder / name, time, state, tracked[chosen], clouds[chosen], _names(run))
        listed.append((0.0, part, name))
    _write_collection(folder / "trajectory.pvd", listed)


def _write_lines(
    path: Path,
    time: NDArray[np.float64],
    state: NDArray[np.float64],
    charges: NDArray[np.int64],
    clouds: NDArray[np.int64],
    names: Sequence[str],
) -> None:
    """Paths (records, charges, 6), each as long as its charge was there."""
    rows = state.transpose(1, 0, 2)
    there = np.isfinite(rows).all(axis=2)
    points = rows[there]
    lengths = there.sum(axis=1)
    values: Values = [
        ("t", np.broadcast_to(time, there.shape)[there], "s"),
        ("proper velocity", points[:, 3:], "m/s"),
        ("id", np.repeat(charges, lengths), "1"),
        ("cloud", np.repeat(clouds, lengths), "1"),
    ]
    offsets = np.concatenate([[0], np.cumsum(lengths[lengths > 0])])
    lines = (offsets, np.arange(len(points)))
    _write_polydata(path, points[:, :3], values, names, None, lines=lines)


def _write_polydata(
    path: Path,
    position: NDArray[np.float64],
    values: Values,
    names: Sequence[str],
    time: float | None,
    vertices: tuple[NDArray[Any], NDArray[Any]] | None = None,
    lines: tuple[NDArray[Any], NDArray[Any]] | None = None,
) -> None:
    """A file of points with values, and the cells they make up: where each begins, its points."""
    from vtkmodules.vtkCommonCore import vtkPoints, vtkStringArray
    from vtkmodules.vtkCommonDataModel import vtkCellArray, vtkPolyData
    from vtkmodules.vtkIOXML import vtkXMLPolyDataWriter

    data, points = vtkPolyData(), vtkPoints()
    points.SetData(_array("position", position, "m"))
    data.SetPoints(points)
    for cells, put in ((vertices, data.SetVerts), (lines, data.SetLines)):
        if cells is not None:
            made = vtkCellArray()
            made.SetData(*(_array("", each.astype(np.int64), "") for each in cells))
            put(made)
    for name, each, unit in values:
        data.GetPointData().AddArray(_array(name, each, unit))
    listed = vtkStringArray()
    listed.SetName("clouds")
    for name in names:
        listed.InsertNextValue(name)
    data.GetFieldData().AddArray(listed)
    if time is not None:
        data.GetFieldData().AddArray(_array("TimeValue", np.array([time]), "s"))
    writer = vtkXMLPolyDataWriter()
    writer.SetFileName(str(path))
    writer.SetInputData(data)
    writer.SetHeaderTypeToUInt64()
    writer.SetDataModeToAppended()
    writer.EncodeAppendedDataOff()
    writer.SetCompressorTypeToNone()
    told: list[str] = []
    with quiet_library():
        writer.AddObserver("ErrorEvent", lambda *_: told.append("error"))
        if not writer.Write() or told or writer.GetErrorCode():
            raise OSError(None, "the disk refuses the file, or is full")


def _array(name: str, values: NDArray[Any], unit: str) -> Any:
    """An array of the library with a copy of the values."""
    from vtkmodules.util.numpy_support import numpy_to_vtk, numpy_to_vtkIdTypeArray
    from vtkmodules.vtkCommonCore import vtkDataArray

    if not name:
        return numpy_to_vtkIdTypeArray(np.ascontiguousarray(values), deep=True)
    made = numpy_to_vtk(np.ascontiguousarray(values), deep=True)
    made.SetName(name)
    if unit:
        made.GetInformation().Set(vtkDataArray.UNITS_LABEL(), unit)
    return made


def _write_collection(path: Path, listed: Sequence[tuple[float, int, str]]) -> None:
    """Which file holds what time: times, parts and names."""
    root = ET.Element("VTKFile", type="Collection", version="0.1", byte_order="LittleEndian")
    collection = ET.SubElement(root, "Collection")
    for time, part, name in listed:
        ET.SubElement(
            collection, "DataSet", timestep=repr(time), group="", part=str(part), file=name
        )
    ET.indent(root)
    ET.ElementTree(root).write(path, encoding="utf-8", xml_declaration=True)
