"""Shapes of electrodes in space: their bodies are what the keys say, and sound meshes."""

from __future__ import annotations

import builtins
import struct

import numpy as np
import pytest
from pydantic import TypeAdapter, ValidationError

from driftwell.electrodes.form import AnyShape
from driftwell.electrodes.shapes.mesh import Mesh as MeshShape
from driftwell.electrodes.shapes.table import SPATIAL_KINDS
from driftwell.errors import ScenarioError
from driftwell.geometry.mesh_faults import mesh_faults
from driftwell.geometry.meshing import mesh_of
from tests.electrodes.spatial_shapes import SHEETS, SPATIAL

SHAPES = TypeAdapter(AnyShape)


def shape(name, keys):
    """A shape from its keys, as a scenario gives them."""
    return SHAPES.validate_python({"kind": name, **keys})


def volume(mesh):
    """Volume within a mesh, m^3, positive where triangles face outwards."""
    a, b, c = (mesh.vertices[mesh.triangles[:, k]] for k in range(3))
    return np.einsum("ij,ij->", a, np.cross(b, c)) / 6.0


@pytest.mark.parametrize("name", SPATIAL)
def test_a_shape_encloses_its_volume(name, tmp_path):
    """Fair facets enclose the volume of the closed form, to 2 % at a turn of 22 degrees."""
    keys, cubic_mm = SPATIAL[name]
    (body,) = shape(name, keys).solids(tmp_path)
    mesh = mesh_of(body, 1.5e-3, fair=True)
    assert cubic_mm * 1e-9 == pytest.approx(volume(mesh), rel=0.02)


@pytest.mark.parametrize("name", SPATIAL)
@pytest.mark.parametrize("fair", [False, True])
def test_a_shape_becomes_a_sound_mesh(name, fair, tmp_path):
    """The triangles of every shape close, face outwards, and do not cross."""
    (body,) = shape(name, SPATIAL[name][0]).solids(tmp_path)
    mesh = mesh_of(body, 1.5e-3, fair=fair)
    assert mesh.closed
    assert mesh_faults(mesh) == []


@pytest.mark.parametrize("name", SHEETS)
def test_a_sheet_becomes_an_open_mesh(name, tmp_path):
    """Without thickness a shape is one layer of triangles with a rim."""
    (body,) = shape(name, SHEETS[name]).solids(tmp_path)
    mesh = mesh_of(body, 1.5e-3)
    assert not mesh.closed
    assert mesh_faults(mesh) == []


def test_every_kind_is_among_the_examples_and_says_what_it_is(tmp_path):
    """Each kind in the table has an example here, and describes itself with its kind."""
    shapes = [shape(name, keys) for name, (keys, _) in SPATIAL.items()]
    shapes.append(shape("mesh", {"path": "a.stl", "unit": "1 mm"}))
    assert set(SPATIAL_KINDS) == {type(each) for each in shapes}
    for each in shapes[:-1]:
        assert each.kind in each.words()
    assert "as in the file a.stl, in units of 1 mm" == shapes[-1].words()


@pytest.mark.parametrize(
    ("name", "change", "why"),
    [
        ("plate", {"holes": [{"radius": "5 mm"}]}, "within the plate"),
        ("plate", {"holes": [{"radius": "1 mm"}, {"radius": "2 mm"}]}, "must not overlap"),
        ("plate", {"slits": [{"length": "1 mm", "width": "2 mm"}]}, "greater than `width`"),
        ("ring", {"section": ["1 mm", "1 mm"]}, "either `section_radius` or `section`"),
        ("ring", {"section_radius": "8 mm"}, "must not reach its axis"),
        ("cone", {"radii": ["0 mm", "0 mm"]}, "greater than 0"),
        ("wire", {"end": ["0 mm", "-5 mm", "0 mm"]}, "different places"),
        ("mesh", {"path": "../a.stl", "unit": "1 mm"}, "own folder"),
        ("mesh", {"path": "a.obj", "unit": "1 mm"}, "must end in .stl"),
    ],
)
def test_what_cannot_be_is_refused(name, change, why):
    """Bodies without sense are refused with what is needed."""
    with pytest.raises(ValidationError, match=why):
        shape(name, {**SPATIAL.get(name, ({},))[0], **change})


def stl(path, corners):
    """Write triangles (k, 3, 3) as a binary STL file."""
    with path.open("wb") as file:
        file.write(b"made by a test".ljust(80) + struct.pack("<I", len(corners)))
        for triangle in corners:
            file.write(struct.pack("<12f", 0, 0, 0, *triangle.ravel()) + b"\0\0")


def cube_corners():
    """Triangles of a cube of side 10, facing outwards."""
    (body,) = shape("box", {"centre": ["0 m"] * 3, "size": ["10 m"] * 3}).solids(None)
    mesh = mesh_of(body, 5.0, grade=1.0)
    return mesh.vertices[mesh.triangles]


def test_a_file_of_triangles_is_read_in_its_unit(tmp_path):
    """An STL cube of side 10 in mm has the volume 1000 mm^3 and no faults."""
    stl(tmp_path / "cube.stl", cube_corners())
    (mesh,) = MeshShape(kind="mesh", path="cube.stl", unit="1 mm").solids(tmp_path)
    assert 1e-6 == pytest.approx(volume(mesh), rel=1e-6)
    assert mesh_faults(mesh) == []
    assert 8 * 3 + 2 == len(mesh.vertices)


@pytest.mark.parametrize(
    ("spoil", "why"),
    [
        (lambda c: c[1:], "3 open edges so that it bounds no volume; the first at"),
        (lambda c: c[:, ::-1], "turned inside out"),
        (
            lambda c: np.concatenate([c[:1, ::-1], c[1:]]),
            "3 edges between triangles of which one faces the wrong way",
        ),
        (lambda c: np.concatenate([c, c[:1]]), "1 triangle given more than once"),
        (
            lambda c: np.concatenate([c, c + np.array([4.0, 3.0, 2.0])]),
            "triangles pierced by others",
        ),
    ],
)
def test_all_faults_of_a_file_are_told(spoil, why, tmp_path):
    """An unsound file is refused: what is wrong, how often, and where first."""
    stl(tmp_path / "cube.stl", spoil(cube_corners()))
    with pytest.raises(ScenarioError, match=why) as told:
        MeshShape(kind="mesh", path="cube.stl", unit="1 mm").solids(tmp_path)
    assert str(told.value).startswith("cube.stl: ")


@pytest.mark.parametrize("content", [None, b"", b"nonsense\n" * 30])
def test_a_file_that_cannot_be_used_is_named(content, tmp_path):
    """A missing file, an empty one and one of another kind give a message, not a traceback."""
    if content is not None:
        (tmp_path / "lens.stl").write_bytes(content)
    with pytest.raises(ScenarioError, match=r"^lens\.stl: "):
        MeshShape(kind="mesh", path="lens.stl", unit="1 mm").solids(tmp_path)


def test_without_the_library_it_says_what_to_install(tmp_path, monkeypatch):
    """Where trimesh is missing, the message says how to get it."""
    stl(tmp_path / "cube.stl", cube_corners())
    real = builtins.__import__

    def without(name, *rest):
        if name == "trimesh":
            raise ImportError(name)
        return real(name, *rest)

    monkeypatch.setattr(builtins, "__import__", without)
    with pytest.raises(ScenarioError, match=r"pip install 'driftwell\[mesh\]'"):
        MeshShape(kind="mesh", path="cube.stl", unit="1 mm").solids(tmp_path)
