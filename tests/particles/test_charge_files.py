"""Clouds read from CSV and HDF5 files: what they hold, and what is refused."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import h5py
import numpy as np
import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st
from hypothesis.extra.numpy import arrays

from driftwell.errors import ScenarioError
from driftwell.forms.faults import Fault
from driftwell.particles.charge_columns import CHARGE_RULES
from driftwell.particles.shapes import file as shape_file
from driftwell.particles.state import Particles

Load = Callable[..., Particles]
FaultsOf = Callable[..., list[Fault]]

MANY_FILES = settings(
    max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
COORDINATE = st.floats(-1e3, 1e3, allow_subnormal=False)
SIX_COLUMNS = arrays(np.float64, st.tuples(st.integers(1, 20), st.just(6)), elements=COORDINATE)


def from_file(load: Load, folder: Path, path: str = "start.csv", **keys: Any) -> Particles:
    return load(shape={"kind": "file", "path": path} | keys, count=None, folder=folder)


def message(load: Load, folder: Path, path: str = "start.csv") -> list[str]:
    with pytest.raises(ScenarioError) as caught:
        from_file(load, folder, path)
    return str(caught.value).splitlines()


def write_hdf5(path: Path, columns: dict[str, Any], units: dict[str, Any] | None = None) -> None:
    with h5py.File(path, "w") as file:
        for name, values in columns.items():
            file[name] = values
            unit = (units or {}).get(name, "m" if name in "xyz" else "m/s")
            if unit is not None:
                file[name].attrs["unit"] = unit


# -- what a file holds ------------------------------------------------------------------------


@MANY_FILES
@given(table=SIX_COLUMNS)
def test_charges_written_as_csv_are_read_bit_for_bit(
    load: Load, tmp_path: Path, table: np.ndarray
) -> None:
    rows = [", ".join(map(repr, row)) for row in table.tolist()]
    heading = "x [m], y [m], z [m], ux [m/s], uy [m/s], uz [m/s]"
    (tmp_path / "start.csv").write_text("\n".join([heading, *rows]))
    found = from_file(load, tmp_path)
    assert table.T.tolist() == [*found.position.tolist(), *found.velocity.tolist()]


@MANY_FILES
@given(table=SIX_COLUMNS)
def test_charges_written_as_hdf5_are_read_bit_for_bit(
    load: Load, tmp_path: Path, table: np.ndarray
) -> None:
    names = ("x", "y", "z", "ux", "uy", "uz")
    write_hdf5(tmp_path / "start.h5", dict(zip(names, table.T, strict=True)))
    found = from_file(load, tmp_path, "start.h5")
    assert table.T.tolist() == [*found.position.tolist(), *found.velocity.tolist()]


def test_columns_of_a_csv_file_come_in_any_order_and_in_their_own_units(
    load: Load, tmp_path: Path
) -> None:
    (tmp_path / "start.csv").write_text(
        "# invented\n\nvz[km/s],x [mm], z [um] ,y [cm],vx [m/s],vy [m/s]\n"
        "1,2,3,4,0,0\n# between\n\n 180000 , -2e0, +3., .4, 0, 0 \n",
        encoding="utf-8-sig",
    )
    found = from_file(load, tmp_path)
    expected = [[2e-3, -2e-3], [4e-2, 4e-3], [3e-6, 3e-6]]
    assert np.allclose(expected, found.position, rtol=1e-15, atol=0.0)
    fast = 1.8e8 / math.sqrt(1.0 - (1.8e8 / 299792458.0) ** 2)
    assert np.allclose([1000.0, fast], found.velocity[2], rtol=1e-10, atol=0.0)


def test_a_csv_file_may_end_its_lines_as_other_systems_do(load: Load, tmp_path: Path) -> None:
    (tmp_path / "start.csv").write_bytes(b"x [m],y [m],z [m]\r\n1,2,3\r\n4,5,6\r\n")
    assert [[1.0, 4.0], [2.0, 5.0], [3.0, 6.0]] == from_file(load, tmp_path).position.tolist()


def test_columns_of_an_hdf5_file_have_their_own_types_and_units(load: Load, tmp_path: Path) -> None:
    columns = {
        "x": np.array([1, 2], dtype=np.int32),
        "y": np.array([0.5, 1.5], dtype=np.float32),
        "z": np.array([0.0, 1.0]),
    }
    write_hdf5(tmp_path / "start.hdf5", columns, {"x": "mm", "y": "um", "z": "m"})
    found = from_file(load, tmp_path, "start.hdf5").position
    assert np.allclose([[1e-3, 2e-3], [5e-7, 1.5e-6], [0.0, 1.0]], found, rtol=1e-15, atol=0.0)


def test_a_file_in_a_folder_below_is_read_and_moved_to_the_centre(
    load: Load, tmp_path: Path
) -> None:
    (tmp_path / "data").mkdir()
    (tmp_path / "data" / "start.csv").write_text("x [m], y [m], z [m]\n1, 2, 3\n")
    found = from_file(load, tmp_path, "data/start.csv", centre=["10 m", "20 m", "30 m"])
    assert [[11.0], [22.0], [33.0]] == found.position.tolist()


def test_a_file_without_velocities_leaves_them_to_the_motion(load: Load, tmp_path: Path) -> None:
    (tmp_path / "start.csv").write_text("x [m], y [m], z [m]\n1, 2, 3\n4, 5, 6\n")
    shape = {"kind": "file", "path": "start.csv"}
    found = load(
        shape=shape, count=None, folder=tmp_path, motion={"velocity": ["0 m/s", "0 m/s", "5 m/s"]}
    )
    assert [5.0, 5.0] == pytest.approx(found.velocity[2].tolist(), rel=1e-15, abs=0.0)


def test_a_file_with_velocities_leaves_no_room_for_a_motion(
    load: Load, faults_of: FaultsOf, tmp_path: Path
) -> None:
    heading = "x [m], y [m], z [m], vx [m/s], vy [m/s], vz [m/s]"
    (tmp_path / "start.csv").write_text(f"{heading}\n1, 2, 3, 4, 5, 6\n")
    keys: dict[str, Any] = {
        "shape": {"kind": "file", "path": "start.csv"},
        "count": None,
        "folder": tmp_path,
        "motion": {"temperature": "300 K"},
    }
    assert [("motion",)] == [fault.path for fault in faults_of(**keys)]
    with pytest.raises(ScenarioError, match="leave out `motion`"):
        load(**keys)


# -- what is refused in a CSV file ------------------------------------------------------------

XYZ = "x [m], y [m], z [m]"


@pytest.mark.parametrize(
    ("text", "told"),
    [
        ("", ["start.csv:1: must name each column and its unit, such as x [mm], y [mm], z [mm]"]),
        ("1, 2, 3\n", ["start.csv:1: must name each column and its unit"]),
        ("x, y, z\n1, 2, 3\n", ["start.csv:1: must name each column and its unit"]),
        ("x [m]; y [m]; z [m]\n1; 2; 3\n", ["start.csv:1: must name each column"]),
        ("x [m], y [m]\n1, 2\n", ['start.csv:1: column "z" is missing']),
        (f"{XYZ}, q [C]\n1, 2, 3, 4\n", ['start.csv:1: unknown column "q"']),
        (f"{XYZ}, x [m]\n1, 2, 3, 4\n", ['start.csv:1: column "x" is there 2 times']),
        (
            f"{XYZ}, vx [m/s]\n1, 2, 3, 4\n",
            [
                'start.csv:1: column "vy" is missing beside vx',
                'start.csv:1: column "vz" is missing beside vx',
            ],
        ),
        (
            f"{XYZ}, vx [m/s], vy [m/s], vz [m/s], ux [m/s], uy [m/s], uz [m/s]\n",
            ["start.csv:1: needs either vx, vy, vz or ux, uy, uz, not both"],
        ),
        ("# a\nx [s], y [m], z [m]\n", ['start.csv:2: unit "s" of column "x": needs a length']),
        ("x [], y [m], z [m]\n", ["start.csv:1: must name each column and its unit"]),
        ("x [mmm], y [m], z [m]\n", ['start.csv:1: unit "mmm" of column "x"']),
        (XYZ, ["start.csv: holds no charges"]),
        (f"{XYZ}\n\n# none\n", ["start.csv: holds no charges"]),
        (f"{XYZ}\n1, 2\n", ["start.csv:2: has 2 columns; needs 3"]),
        (f"{XYZ}\n1, 2, 3\n\n1, 2, 3, 4\n", ["start.csv:4: has 4 columns; needs 3"]),
        (f"{XYZ}\n1, two, 3\n", ['start.csv:2: "two" in column "y" must be a finite number']),
        (f"{XYZ}\n1, , 3\n", ['start.csv:2: "" in column "y" must be a finite number']),
        (f"{XYZ}\nnan, inf, -Infinity\n", ['start.csv:2: "nan" in column "x"'] + [None] * 2),
        (f"{XYZ}\n1, 1e999, 3\n", ['start.csv:2: "1e999" in column "y" must be a finite number']),
        (f"{XYZ}\n1_000, 2, 3\n", ['start.csv:2: "1_000" in column "x"']),
        (f"{XYZ}\n0x1, 2, 3\n", ['start.csv:2: "0x1" in column "x"']),
        (f"{XYZ}\n١, 2, 3\n", ['start.csv:2: "١" in column "x"']),
        (f"{XYZ}\n1 mm, 2, 3\n", ['start.csv:2: "1 mm" in column "x"']),
        (
            f"{XYZ}, vx [m/s], vy [m/s], vz [m/s]\n0, 0, 0, 0, 0, 0\n\n0, 0, 0, 2e8, 2e8, 2e8\n",
            ["start.csv:4: vx, vy, vz must be slower than light"],
        ),
        (f"{XYZ}\n" + "x, 2, 3\n" * 9, [f"start.csv:{line}: " for line in range(2, 7)]),
        (f"{XYZ}\n1, 2, {'3' * 20_000}\n", ["start.csv:2: is longer than 10000 characters"]),
        ("x [1e200 m], y [m], z [m]\n1e200, 2, 3\n", ["start.csv:1: unit"]),
    ],
)
def test_a_malformed_csv_file_is_refused_with_the_line_of_each_fault(
    load: Load, faults_of: FaultsOf, tmp_path: Path, text: str, told: list[str | None]
) -> None:
    (tmp_path / "start.csv").write_text(text)
    found = message(load, tmp_path)
    assert len(told) == len(found)
    for begin, line in zip(told, found, strict=True):
        assert begin is None or line.startswith(begin)
    shape = {"kind": "file", "path": "start.csv"}
    faults = faults_of(shape=shape, count=None, folder=tmp_path)
    assert [(("shape", "path"), line) for line in found] == [(f.path, f.needed) for f in faults]


def test_bytes_that_are_no_text_are_refused_at_their_line(load: Load, tmp_path: Path) -> None:
    (tmp_path / "start.csv").write_bytes(XYZ.encode() + b"\n1, 2, 3\n1, \xff\xfe, 3\n")
    assert message(load, tmp_path)[0].startswith("start.csv:3: ")


def test_numbers_that_are_finite_only_without_their_unit_are_refused(
    load: Load, tmp_path: Path
) -> None:
    (tmp_path / "start.csv").write_text("x [km], y [m], z [m]\n1e307, 2, 3\n")
    assert "not finite" in message(load, tmp_path)[0]


def test_a_file_of_more_charges_than_a_cloud_may_have_is_refused(
    load: Load, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(shape_file, "CHARGE_RULES", replace(CHARGE_RULES, most=3))
    (tmp_path / "start.csv").write_text(XYZ + "\n1, 2, 3" * 3)
    assert 3 == len(from_file(load, tmp_path))
    (tmp_path / "start.csv").write_text(XYZ + "\n1, 2, 3" * 4)
    assert ["start.csv:5: is one charge more than the 3 there may be"] == message(load, tmp_path)


@MANY_FILES
@given(text=st.text(st.sampled_from("xyzuv [],.\n#0123456789e+-m/s\r\t\x00é"), max_size=80))
def test_any_text_is_read_or_refused_in_words(load: Load, tmp_path: Path, text: str) -> None:
    (tmp_path / "start.csv").write_text(f"{XYZ}\n{text}", encoding="utf-8")
    told = "start.csv"
    try:
        assert np.isfinite(from_file(load, tmp_path).position).all()
    except ScenarioError as error:
        told = str(error)
    assert told.startswith("start.csv")


# -- what is refused in an HDF5 file ----------------------------------------------------------

ONE = np.array([1.0, 2.0])


@pytest.mark.parametrize(
    ("columns", "units", "told"),
    [
        ({"x": ONE, "y": ONE}, {}, 'start.h5: column "z" is missing'),
        ({"x": ONE, "y": ONE, "z": ONE, "q": ONE}, {}, 'start.h5: unknown column "q"'),
        ({"x": ONE, "y": ONE, "z": ONE}, {"y": None}, 'start.h5 "y": needs its unit as text'),
        ({"x": ONE, "y": ONE, "z": ONE}, {"y": 3}, 'start.h5 "y": needs its unit as text'),
        ({"x": ONE, "y": ONE, "z": ONE}, {"z": "V"}, 'start.h5: unit "V" of column "z"'),
        ({"x": ONE, "y": ONE, "z": np.ones(3)}, {}, 'start.h5 "z": has the shape (3,)'),
        ({"x": np.ones((2, 2)), "y": ONE, "z": ONE}, {}, 'start.h5 "x": has the shape (2, 2)'),
        ({"x": 1.0, "y": 1.0, "z": 1.0}, {}, 'start.h5 "x": has the shape ()'),
        ({"x": [], "y": [], "z": []}, {}, "start.h5: holds no charges"),
        ({"x": ONE, "y": ONE, "z": [b"a", b"b"]}, {}, 'start.h5 "z": does not hold real numbers'),
        ({"x": ONE, "y": ONE, "z": ONE * 1j}, {}, 'start.h5 "z": does not hold real numbers'),
        (
            {"x": ONE, "y": [0.0, math.nan], "z": ONE},
            {},
            'start.h5 "y" row 1 (counted from 0): must be a finite number',
        ),
        (
            dict.fromkeys("xyz", ONE) | dict.fromkeys(("vx", "vy", "vz"), ONE * 200000000.0),
            {},
            "start.h5 row 0 (counted from 0): vx, vy, vz must be slower than light",
        ),
    ],
)
def test_a_malformed_hdf5_file_is_refused_with_the_place_of_the_fault(
    load: Load, tmp_path: Path, columns: dict[str, Any], units: dict[str, Any], told: str
) -> None:
    write_hdf5(tmp_path / "start.h5", columns, units)
    assert message(load, tmp_path, "start.h5")[0].startswith(told)


def test_an_hdf5_file_that_leads_to_another_file_is_refused(load: Load, tmp_path: Path) -> None:
    outside = tmp_path / "outside.h5"
    inside = tmp_path / "in"
    inside.mkdir()
    write_hdf5(outside, dict.fromkeys("xyz", ONE))
    (tmp_path / "raw").write_bytes(ONE.tobytes())
    layout = h5py.VirtualLayout(shape=(2,), dtype=np.float64)
    layout[:] = h5py.VirtualSource(outside, "z", shape=(2,))
    told = {}
    for kind in ("external link", "soft link", "virtual", "external data", "group"):
        write_hdf5(inside / "start.h5", {"x": ONE, "y": ONE})
        with h5py.File(inside / "start.h5", "a") as file:
            if kind == "external link":
                file["z"] = h5py.ExternalLink(str(outside), "z")
            elif kind == "soft link":
                file["z"] = h5py.SoftLink("/x")
            elif kind == "virtual":
                file.create_virtual_dataset("z", layout).attrs["unit"] = "m"
            elif kind == "external data":
                raw = [(str(tmp_path / "raw"), 0, ONE.nbytes)]
                file.create_dataset("z", (2,), np.float64, external=raw).attrs["unit"] = "m"
            else:
                file.create_group("z")
        told[kind] = message(load, inside, "start.h5")[0]
    assert 'start.h5 "z": is a link; needs the numbers themselves' == told["external link"]
    assert 'start.h5 "z": is a link; needs the numbers themselves' == told["soft link"]
    assert told["virtual"].startswith('start.h5 "z": keeps its data in another file')
    assert told["external data"].startswith('start.h5 "z": keeps its data in another file')
    assert told["group"].startswith('start.h5 "z": is a group')


def test_a_damaged_hdf5_file_is_read_or_refused_in_words(load: Load, tmp_path: Path) -> None:
    write_hdf5(tmp_path / "whole.h5", dict.fromkeys("xyz", ONE))
    whole = (tmp_path / "whole.h5").read_bytes()
    random = np.random.default_rng(11)
    told = []
    for _ in range(80):
        damaged = bytearray(whole)
        for place in random.integers(0, len(whole), 20):
            damaged[place] = random.integers(0, 256)
        (tmp_path / "start.h5").write_bytes(damaged[: random.integers(1, len(whole))])
        try:
            from_file(load, tmp_path, "start.h5")
        except ScenarioError as error:
            told.append(str(error))
    assert len(told) > 40
    assert all(text.startswith("start.h5") for text in told)


# -- which files may be read ------------------------------------------------------------------


@pytest.mark.parametrize(
    ("path", "needed"),
    [
        ("/etc/start.csv", "in the scenario's own folder"),
        ("../start.csv", "in the scenario's own folder"),
        ("data/../../start.csv", "in the scenario's own folder"),
        ("..\\start.csv", "separated by /"),
        ("C:/start.csv", "separated by /"),
        ("a\x00.csv", "plain text"),
        ("start.txt", "must end in .csv, .h5, .hdf5"),
        ("", "must end in"),
        (".csv", "must end in"),
    ],
)
def test_a_path_out_of_the_folder_or_of_another_kind_is_a_fault(
    faults_of: FaultsOf, path: str, needed: str
) -> None:
    faults = faults_of(shape={"kind": "file", "path": path}, count=None)
    assert [("shape",)] == [fault.path for fault in faults]
    assert needed in faults[0].needed


def test_a_link_out_of_the_folder_is_refused_when_followed(load: Load, tmp_path: Path) -> None:
    inside = tmp_path / "in"
    inside.mkdir()
    (tmp_path / "start.csv").write_text(f"{XYZ}\n1, 2, 3\n")
    (inside / "start.csv").symlink_to(tmp_path / "start.csv")
    (inside / "loop.csv").symlink_to(inside / "loop.csv")
    (inside / "folder.csv").mkdir()
    assert "leads out of the scenario's folder" in message(load, inside)[0]
    assert "no such file" in message(load, inside, "none.csv")[0]
    assert "is not a file" in message(load, inside, "folder.csv")[0]
    assert message(load, inside, "loop.csv")[0].startswith("loop.csv: ")
    assert message(load, inside, "a/" * 3000 + "x.csv")[0].startswith("a/")


def test_text_in_a_file_called_hdf5_is_refused(load: Load, tmp_path: Path) -> None:
    (tmp_path / "start.h5").write_text(f"{XYZ}\n1, 2, 3\n")
    assert ["start.h5: cannot be read (damaged, or not a file of this kind)"] == message(
        load, tmp_path, "start.h5"
    )


def test_the_largest_number_of_charges_is_checked_for_every_format(
    load: Load, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(shape_file, "CHARGE_RULES", replace(CHARGE_RULES, most=2))
    write_hdf5(tmp_path / "start.h5", dict.fromkeys("xyz", np.zeros(3)))
    assert ["start.h5: holds more than 2 charges"] == message(load, tmp_path, "start.h5")
