"""Charges in openPMD, Parquet and VTK from any program: what is taken, and what is refused."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import openpmd_api
import pyarrow as pa
import pyarrow.parquet as pq
import pytest
from vtkmodules.util.numpy_support import numpy_to_vtk
from vtkmodules.vtkCommonCore import vtkDataArray, vtkPoints
from vtkmodules.vtkCommonDataModel import vtkPolyData
from vtkmodules.vtkIOXML import vtkXMLPolyDataWriter

from driftwell.constants import ATOMIC_MASS, ELEMENTARY_CHARGE
from driftwell.errors import ScenarioError
from driftwell.forms.faults import Fault
from driftwell.particles.charge_columns import CHARGE_RULES
from driftwell.particles.shapes import file as shape_file
from driftwell.particles.state import Particles

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]
MASS = 100.0 * ATOMIC_MASS
X = np.array([0.5, -1.5, 2.0])
P = np.array([1e-22, 2e-22, -3e-22])
SCALAR = openpmd_api.Record_Component.SCALAR


def from_file(load: Load, folder: Path, path: str, **keys: Any) -> Particles:
    cloud = {name: keys.pop(name) for name in ("weight", "total_charge") if name in keys}
    shape = {"kind": "file", "path": path} | keys
    return load(shape=shape, count=None, folder=folder, **cloud)


def told(load: Load, folder: Path, path: str, **keys: Any) -> str:
    with pytest.raises(ScenarioError) as caught:
        from_file(load, folder, path, **keys)
    assert 5 >= len(str(caught.value).splitlines())
    return str(caught.value).splitlines()[0]


# -- openPMD ----------------------------------------------------------------------------------


def write_openpmd(path: Path, **changes: Any) -> None:
    """Two iterations of one species, by the standard's general library, places in mm."""
    series = openpmd_api.Series(str(path), openpmd_api.Access.create)
    for number, time in ((0, 0.0), (500, 2.0)):
        iteration = series.iterations[number]
        iteration.time, iteration.dt, iteration.time_unit_SI = time, 1.0, 1e-6
        group = iteration.particles["ions"]
        length = {openpmd_api.Unit_Dimension.L: 1}
        momentum = {
            openpmd_api.Unit_Dimension.L: 1,
            openpmd_api.Unit_Dimension.M: 1,
            openpmd_api.Unit_Dimension.T: -1,
        }
        for name, dimension, unit, values in (
            ("position", length, 1e-3, X + number),
            ("positionOffset", length, 1.0, np.full(3, 10.0)),
            ("momentum", momentum, 2.0, P),
        ):
            group[name].unit_dimension = dimension
            for axis in "xyz":
                _put(group[name][axis], values, unit)
        _put(group["weighting"][SCALAR], np.full(3, 4.0), 1.0)
        group["mass"].unit_dimension = {openpmd_api.Unit_Dimension.M: 1}
        _put(group["mass"][SCALAR], np.full(3, changes.get("mass", MASS)), 1.0)
        series.flush()
    series.close()


def _put(component: Any, values: np.ndarray, unit: float) -> None:
    component.reset_dataset(openpmd_api.Dataset(values.dtype, values.shape))
    component.store_chunk(values.copy())
    component.unit_SI = unit


def test_particles_of_another_program_are_read_in_the_units_of_the_file(
    load: Load, tmp_path: Path
) -> None:
    write_openpmd(tmp_path / "start.h5")
    found = from_file(load, tmp_path, "start.h5", iteration=500)
    expected = 10.0 + (X + 500.0) * 1e-3
    assert expected.tolist() == pytest.approx(found.position[2].tolist(), rel=1e-15, abs=0.0)
    # proper velocity p / m
    assert (2.0 * P / MASS).tolist() == pytest.approx(
        found.velocity[0].tolist(), rel=1e-15, abs=0.0
    )
    assert [4.0] * 3 == found.weight.tolist()
    assert [9.0] * 3 == from_file(load, tmp_path, "start.h5", at="2 us", weight=9).weight.tolist()


def test_values_of_whole_macro_particles_are_divided_by_their_weight(
    load: Load, tmp_path: Path
) -> None:
    write_openpmd(tmp_path / "start.h5", mass=4.0 * MASS)
    with h5py.File(tmp_path / "start.h5", "a") as file:
        for name in ("mass", "momentum"):
            record = file[f"data/0/particles/ions/{name}"]
            record.attrs["macroWeighted"] = np.uint32(1)
            record.attrs["weightingPower"] = 1.0
    found = from_file(load, tmp_path, "start.h5", at="start")
    assert (2.0 * P / (4.0 * MASS)).tolist() == pytest.approx(
        found.velocity[1].tolist(), rel=1e-15, abs=0.0
    )


def test_momenta_without_a_mass_are_those_of_the_species(load: Load, tmp_path: Path) -> None:
    write_openpmd(tmp_path / "start.h5")
    with h5py.File(tmp_path / "start.h5", "a") as file:
        del file["data/0/particles/ions/mass"]
    found = from_file(load, tmp_path, "start.h5", at="start")
    assert (2.0 * P / MASS).tolist() == pytest.approx(
        found.velocity[1].tolist(), rel=1e-15, abs=0.0
    )


IONS = "data/0/particles/ions"


def _attribute(path: str, name: str, value: Any) -> Callable[[Any], None]:
    def spoil(file: Any) -> None:
        file[path].attrs[name] = value

    return spoil


def _replaced(path: str, values: Any, **attributes: Any) -> Callable[[Any], None]:
    def spoil(file: Any) -> None:
        kept = dict(file[path].attrs)
        del file[path]
        file[path] = values
        file[path].attrs.update(kept | attributes)

    return spoil


def _constant(path: str, value: Any, shape: Any) -> Callable[[Any], None]:
    def spoil(file: Any) -> None:
        kept = dict(file[path].attrs)
        del file[path]
        file.create_group(path).attrs.update(kept | {"value": value, "shape": shape})

    return spoil


def _linked(file: Any) -> None:
    del file[f"{IONS}/position/z"]
    file[f"{IONS}/position/z"] = h5py.ExternalLink("other.h5", "z")


def _without(path: str) -> Callable[[Any], None]:
    def spoil(file: Any) -> None:
        del file[path]

    return spoil


def _as_it_is(file: Any) -> None:
    """Nothing is spoilt."""


MANY = np.array([2**60], np.uint64)


@pytest.mark.parametrize(
    ("spoil", "keys", "needed"),
    [
        (_as_it_is, {"at": None}, "holds 2 times, 0 s, 2e-06 s; needs `at`"),
        (_as_it_is, {"at": "1 us"}, "holds nothing at 1e-06 s; needs 0 s, 2e-06 s"),
        (_as_it_is, {"at": None, "iteration": 7}, "has no iteration 7; needs 0, 500"),
        (_as_it_is, {"of": "load"}, 'has no charges of "load"; needs ions'),
        (_attribute("/", "openPMD", "2.0.0"), {}, 'is openPMD "2.0.0"; needs version 1'),
        (_attribute("/", "basePath", "/x/"), {}, "needs a basePath of"),
        (_attribute("data/0", "time", np.nan), {}, "needs a finite number in the attribute time"),
        (_attribute(f"{IONS}/position/x", "unitSI", "mm"), {}, "finite number in the attribute"),
        (_attribute(f"{IONS}/position", "unitDimension", np.zeros(7)), {}, "needs a unitDimension"),
        (_attribute(f"{IONS}/momentum", "unitDimension", "a"), {}, "needs a unitDimension"),
        (_without(f"{IONS}/position/z"), {}, '"z" is missing'),
        (_without(f"{IONS}/positionOffset"), {}, '"positionOffset" is missing'),
        (_without(IONS), {}, "holds no charges at that time"),
        (_linked, {}, '"z" is a link'),
        (_replaced(f"{IONS}/position/z", [b"a", b"b", b"c"]), {}, "does not hold real numbers"),
        (_replaced(f"{IONS}/position/z", [1.0, np.nan, 2.0]), {}, "row 1 (counted from 0)"),
        (_replaced(f"{IONS}/position/z", np.ones(4)), {}, "needs 3 values, as many as position/x"),
        (_replaced(f"{IONS}/mass", 2.0 * MASS * np.ones(3)), {}, "and ion has 1.66054e-25 kg"),
        (_replaced(f"{IONS}/weighting", [1.0, 2.0, 3.0]), {}, "holds weights from 1 to 3"),
        (_replaced(f"{IONS}/weighting", [1.0, 0.0, 1.0]), {}, "weight must be greater than 0"),
        (_constant(f"{IONS}/position/x", 1.0, MANY), {}, "holds more than 10000000 charges"),
        (_constant(f"{IONS}/position/x", np.nan, np.array([3], np.uint64)), {}, "needs a finite"),
        (_constant(f"{IONS}/position/x", 1.0, "many"), {}, "needs one value for each particle"),
    ],
)
def test_openpmd_that_cannot_be_used_is_one_clear_fault(
    load: Load,
    faults_of: FaultsOf,
    tmp_path: Path,
    spoil: Callable[[Any], None],
    keys: dict[str, Any],
    needed: str,
) -> None:
    write_openpmd(tmp_path / "start.h5")
    with h5py.File(tmp_path / "start.h5", "a") as file:
        spoil(file)
    keys = {name: value for name, value in ({"at": "start"} | keys).items() if value is not None}
    line = told(load, tmp_path, "start.h5", **keys)
    assert line.startswith("start.h5")
    assert needed in line
    shape = {"kind": "file", "path": "start.h5"} | keys
    [fault, *_] = faults_of(shape=shape, count=None, folder=tmp_path)
    assert (("shape", "path"), line) == (fault.path, fault.needed)


def test_damaged_openpmd_is_read_or_refused_in_words(load: Load, tmp_path: Path) -> None:
    write_openpmd(tmp_path / "whole.h5")
    whole = (tmp_path / "whole.h5").read_bytes()
    random = np.random.default_rng(11)
    refused = []
    for _ in range(60):
        damaged = bytearray(whole)
        for place in random.integers(0, len(whole), 20):
            damaged[place] = random.integers(0, 256)
        (tmp_path / "start.h5").write_bytes(damaged)
        try:
            assert np.isfinite(from_file(load, tmp_path, "start.h5", at="start").position).all()
        except ScenarioError as error:
            refused.append(str(error))
    assert len(refused) > 5
    assert all(text.startswith("start.h5") or "not finite" in text for text in refused)


# -- Parquet ----------------------------------------------------------------------------------


def write_parquet(path: Path, columns: dict[str, Any], units: dict[str, str]) -> None:
    arrays = {name: pa.array(values) for name, values in columns.items()}
    fields = [
        pa.field(name, array.type, metadata={"unit": units[name]} if name in units else None)
        for name, array in arrays.items()
    ]
    pq.write_table(pa.Table.from_arrays([*arrays.values()], schema=pa.schema(fields)), path)


def test_units_of_parquet_stand_in_the_metadata_or_in_the_names(load: Load, tmp_path: Path) -> None:
    write_parquet(tmp_path / "a.parquet", {"x": X, "y [mm]": X, "z": X}, {"x": "um", "z": "m"})
    found = from_file(load, tmp_path, "a.parquet").position
    expected = [(X * unit).tolist() for unit in (1e-6, 1e-3, 1.0)]
    assert expected == [pytest.approx(row.tolist(), rel=1e-15, abs=0.0) for row in found]


@pytest.mark.parametrize(
    ("columns", "needed"),
    [
        ({"z": X}, '"z": needs its unit in the metadata'),
        ({"z [m]": ["a", "b", "c"]}, '"z": does not hold real numbers (type string)'),
        ({"z [m]": [1.0, None, 2.0]}, '"z" row 1 (counted from 0): must be a finite number'),
        ({"z [m]": [1.0, np.inf, 2.0]}, '"z" row 1 (counted from 0): must be a finite number'),
        ({"z [s]": X}, 'unit "s" of column "z": needs a length'),
        ({"z [m]": X, "q [C]": X}, 'unknown column "q"'),
        ({"z [m]": X, "weight [kg]": X}, 'unit "kg" of column "weight": needs "1"'),
        ({"z [m]": X, "cloud": ["a", "b", "b"]}, "holds charges of a, b; needs `of`"),
        ({"z [m]": X, "cloud": X}, '"cloud": needs a text in each row'),
        ({"z [m]": X, "t [s]": X}, "holds 3 times, -1.5 s, 0.5 s, 2 s; needs `at`"),
        ({"z [m]": [[1.0], [2.0], [3.0]]}, '"z": does not hold real numbers'),
    ],
)
def test_parquet_that_cannot_be_used_is_one_clear_fault(
    load: Load, tmp_path: Path, columns: dict[str, Any], needed: str
) -> None:
    write_parquet(tmp_path / "a.parquet", {"x [m]": X, "y [m]": X} | columns, {})
    line = told(load, tmp_path, "a.parquet")
    assert line.startswith("a.parquet")
    assert needed in line


def test_what_is_no_parquet_is_refused(load: Load, tmp_path: Path) -> None:
    (tmp_path / "a.parquet").write_text("x [m], y [m], z [m]\n1, 2, 3\n")
    expected = "a.parquet: cannot be read (damaged, or not a file of this kind)"
    assert expected == told(load, tmp_path, "a.parquet")


# -- VTK --------------------------------------------------------------------------------------


def write_vtk(path: Path, arrays: dict[str, tuple[np.ndarray, str]], unit: str = "mm") -> None:
    data, points = vtkPolyData(), vtkPoints()
    points.SetData(_labelled("Points", np.column_stack([X, X, X]), unit))
    data.SetPoints(points)
    for name, (values, label) in arrays.items():
        data.GetPointData().AddArray(_labelled(name, values, label))
    writer = vtkXMLPolyDataWriter()
    writer.SetFileName(str(path))
    writer.SetInputData(data)
    assert writer.Write()


def _labelled(name: str, values: np.ndarray, unit: str) -> Any:
    made = numpy_to_vtk(np.ascontiguousarray(values), deep=True)
    made.SetName(name)
    if unit:
        made.GetInformation().Set(vtkDataArray.UNITS_LABEL(), unit)
    return made


def test_points_are_read_with_the_units_of_their_labels(load: Load, tmp_path: Path) -> None:
    speed = np.array([[0.0, 0.0, 1.0]] * 3)
    arrays = {"velocity": (speed, "km/s"), "weight": (np.full(3, 2.0), "1"), "other": (X, "")}
    write_vtk(tmp_path / "a.vtp", arrays)
    found = from_file(load, tmp_path, "a.vtp")
    assert (X * 1e-3).tolist() == pytest.approx(found.position[0].tolist(), rel=1e-15, abs=0.0)
    assert [1000.0] * 3 == pytest.approx(found.velocity[2].tolist(), rel=1e-10, abs=0.0)
    assert [2.0] * 3 == found.weight.tolist()


HEAD = '<VTKFile type="PolyData"><PolyData><Piece NumberOfPoints="{}"/></PolyData></VTKFile>'


@pytest.mark.parametrize(
    ("text", "needed"),
    [
        ("x [m], y [m], z [m]\n1, 2, 3\n", "damaged, or not a file of this kind"),
        ('<VTKFile type="ImageData"></VTKFile>', "needs PolyData"),
        (HEAD.format(10**15), "says NumberOfPoints '1000000000000000'; needs at most 10000001"),
        (HEAD.format(-1), "says NumberOfPoints '-1'"),
        (HEAD.format("9" * 400), "says NumberOfPoints"),
        (HEAD.format(3), "a.vtp"),
        ('<!DOCTYPE a [<!ENTITY b "c">]>' + HEAD.format(3), "declares entities"),
    ],
)
def test_text_that_is_no_file_of_points_is_one_clear_fault(
    load: Load, tmp_path: Path, text: str, needed: str
) -> None:
    (tmp_path / "a.vtp").write_text(text)
    line = told(load, tmp_path, "a.vtp")
    assert line.startswith("a.vtp")
    assert needed in line


@pytest.mark.parametrize(
    ("arrays", "unit", "needed"),
    [
        ({}, "", '"Points": carries no unit (UNITS_LABEL)'),
        ({}, "s", 'unit "s" of column "x": needs a length'),
        ({"velocity": (X, "m/s")}, "m", '"velocity": has 3 times 1 numbers; needs 3 for each'),
        ({"weight": (X * np.nan, "1")}, "m", '"weight" point 0 (counted from 0): must be a finite'),
        ({"cloud": (X, "1")}, "m", '"cloud": needs whole numbers'),
        ({"cloud": (np.array([1, 2, 1]), "1")}, "m", "holds charges of 1, 2; needs `of`"),
    ],
)
def test_points_that_cannot_be_used_are_one_clear_fault(
    load: Load, tmp_path: Path, arrays: dict[str, Any], unit: str, needed: str
) -> None:
    write_vtk(tmp_path / "a.vtp", arrays, unit)
    line = told(load, tmp_path, "a.vtp")
    assert line.startswith("a.vtp")
    assert needed in line


def test_a_damaged_file_of_points_is_read_or_refused_in_words(load: Load, tmp_path: Path) -> None:
    write_vtk(tmp_path / "whole.vtp", {"weight": (np.full(3, 2.0), "1")})
    whole = (tmp_path / "whole.vtp").read_bytes()
    random = np.random.default_rng(11)
    refused = []
    for _ in range(150):
        damaged = bytearray(whole)
        for place in random.integers(0, len(whole), 3):
            damaged[place] = random.choice(list(b'0123456789"<>/ab'))
        (tmp_path / "a.vtp").write_bytes(damaged)
        try:
            assert np.isfinite(from_file(load, tmp_path, "a.vtp").position).all()
        except ScenarioError as error:
            refused.append(str(error))
    assert len(refused) > 50
    assert all(text.startswith("a.vtp") or "not finite" in text for text in refused)


# -- tables of any format, and what is missing --------------------------------------------------


def test_a_csv_file_may_hold_clouds_times_and_momenta(load: Load, tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text(
        "t [us],cloud,x [m],y [m],z [m],px [kg*m/s],py [kg*m/s],pz [kg*m/s]\n"
        '0,"a, b",1,0,0,0,0,0\n1,"a, b",2,0,0,0,0,3e-22\n1,\'=c,3,0,0,0,0,0\n'
    )
    found = from_file(load, tmp_path, "a.csv", of="a, b", at="end")
    assert [2.0] == found.position[0].tolist()
    assert [3e-22 / MASS] == pytest.approx(found.velocity[2].tolist(), rel=1e-15, abs=0.0)
    assert [3.0] == from_file(load, tmp_path, "a.csv", of="=c").position[0].tolist()
    assert "needs `of`" in told(load, tmp_path, "a.csv")
    assert "leave out `of`" in told_of_plain(load, tmp_path, of="a")
    assert "leave out `at`" in told_of_plain(load, tmp_path, at="end")


def told_of_plain(load: Load, folder: Path, **keys: Any) -> str:
    (folder / "plain.csv").write_text("x [m], y [m], z [m]\n1, 2, 3\n")
    return told(load, folder, "plain.csv", **keys)


def test_a_text_that_is_never_closed_is_told_with_its_line(load: Load, tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text('cloud,x [m],y [m],z [m]\na,1,2,3\n"b,1,2,3\n')
    assert told(load, tmp_path, "a.csv").startswith("a.csv:3: ")


def test_charges_are_those_of_the_species(load: Load, tmp_path: Path) -> None:
    for charge in (ELEMENTARY_CHARGE, 2.0 * ELEMENTARY_CHARGE):
        (tmp_path / "a.csv").write_text(f"x [m],y [m],z [m],charge [C]\n1,2,3,{charge!r}\n")
        if charge == ELEMENTARY_CHARGE:
            assert 1 == len(from_file(load, tmp_path, "a.csv"))
    assert "and ion has 1.60218e-19 C" in told(load, tmp_path, "a.csv")


def test_the_largest_number_of_charges_holds_for_every_format(
    load: Load, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(shape_file, "CHARGE_RULES", replace(CHARGE_RULES, most=2))
    write_vtk(tmp_path / "a.vtp", {})
    write_parquet(tmp_path / "a.parquet", dict.fromkeys(("x [m]", "y [m]", "z [m]"), X), {})
    write_openpmd(tmp_path / "a.h5")
    for name, keys in (("a.vtp", {}), ("a.parquet", {}), ("a.h5", {"at": "end"})):
        assert "more than 2" in told(load, tmp_path, name, **keys)


@pytest.mark.parametrize(
    ("name", "module", "extra"),
    [("a.parquet", "pyarrow", "parquet"), ("a.vtp", "vtkmodules", "vtk")],
)
def test_a_missing_library_is_told_with_the_command(
    load: Load, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, name: str, module: str, extra: str
) -> None:
    (tmp_path / name).write_text("")
    for loaded in [each for each in sys.modules if each.split(".")[0] == module]:
        monkeypatch.setitem(sys.modules, loaded, None)
    monkeypatch.setitem(sys.modules, module, None)
    line = told(load, tmp_path, name)
    assert line.endswith(f"install it with: pip install 'driftwell[{extra}]'")


def test_neither_library_is_loaded_where_no_such_file_is_named() -> None:
    code = (
        "import sys, driftwell.particles.cloud, driftwell.exports.table; "
        "print([m for m in ('pyarrow', 'vtkmodules') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert "[]" == done.stdout.strip()
