"""VTK as written, read by the library's own readers: the same bits, units, cells and times."""

from __future__ import annotations

import xml.etree.ElementTree as ET
from pathlib import Path
from typing import Any

import numpy as np
from vtkmodules.util.numpy_support import vtk_to_numpy
from vtkmodules.vtkCommonCore import vtkDataArray
from vtkmodules.vtkIOXML import vtkXMLPolyDataReader

from driftwell.exports.states import states
from driftwell.exports.table import export
from driftwell.exports.wanted import Times
from driftwell.record.reader import Run
from tests.exports.conftest import CLOUDS, TIMES


def read(path: Path) -> Any:
    reader = vtkXMLPolyDataReader()
    reader.SetFileName(str(path))
    reader.Update()
    return reader.GetOutput()


def listed(path: Path) -> list[tuple[float, Path]]:
    """Times and files of a collection."""
    found = ET.parse(path).getroot().iter("DataSet")
    return [(float(each.attrib["timestep"]), path.parent / each.attrib["file"]) for each in found]


def test_snapshots_are_points_with_the_same_bits_at_their_times(run: Run, tmp_path: Path) -> None:
    path = export(run, "vtk", tmp_path / "out", ["snapshots"])
    expected = list(states(run, "snapshots", Times()))
    found = listed(path / "snapshots.pvd")
    assert [each.time for each in expected] == [time for time, _ in found]
    for state, (_, file) in zip(expected, found, strict=True):
        data = read(file)
        assert len(state.id) == data.GetNumberOfVerts()
        points = data.GetPoints().GetData()
        assert state.position.tolist() == vtk_to_numpy(points).tolist()
        assert "m" == points.GetInformation().Get(vtkDataArray.UNITS_LABEL())
        for name, values in (
            ("proper velocity", state.velocity),
            ("charge", state.charge),
            ("mass", state.mass),
            ("weight", state.weight),
            ("id", state.id),
            ("cloud", state.cloud),
        ):
            array = data.GetPointData().GetArray(name)
            assert values.tolist() == vtk_to_numpy(array).tolist()
        names = data.GetFieldData().GetAbstractArray("clouds")
        assert list(CLOUDS) == [names.GetValue(k) for k in range(names.GetNumberOfValues())]


def test_paths_are_lines_that_end_where_a_charge_was_lost(run: Run, tmp_path: Path) -> None:
    path = export(run, "vtk", tmp_path / "out")
    [(_, file)] = listed(path / "trajectory.pvd")
    data = read(file)
    assert 12 == data.GetNumberOfLines()
    _, state = run.trajectory
    time, points = (
        vtk_to_numpy(each)
        for each in (data.GetPointData().GetArray("t"), data.GetPoints().GetData())
    )
    charges = vtk_to_numpy(data.GetPointData().GetArray("id"))
    lengths = [data.GetCell(k).GetNumberOfPoints() for k in range(12)]
    assert [2, 3, 3, 1, 3, 3, 3, 3, 3, 3, 3, 2] == lengths
    for k in range(12):
        own = charges == k
        assert list(TIMES[: lengths[k]]) == time[own].tolist()
        assert state[: lengths[k], k, :3].tolist() == points[own].tolist()
    assert np.isfinite(points).all()
