"""A body read from an STL file beside the scenario."""

from __future__ import annotations

from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.errors import ScenarioError
from driftwell.forms import Length, Positive, checked, key, spelled
from driftwell.forms.inside import check_inside, found_inside
from driftwell.geometry import solid
from driftwell.geometry.mesh_faults import mesh_faults
from driftwell.geometry.patches import Patch, sewn

ENDINGS = (".stl",)


class Mesh(ShapeForm):
    """The triangles of an STL file, binary or text; they must bound a volume."""

    kind: Literal["mesh"]
    path: str = key(
        "STL file in the scenario's folder, relative to it; reading it needs the optional library "
        "trimesh",
        example="lens.stl",
    )
    unit: Positive[Length] = key("length that 1 in the file stands for", example="1 mm")

    @checked
    def _inside(self) -> Self:
        check_inside(self.path, ENDINGS, "path", "scenario")
        return self

    def files_named(self) -> tuple[str, ...]:
        return (self.path,)

    def solids(self, folder: Path) -> tuple[solid.Solid, ...]:
        """The body.

        Raises ScenarioError where the library is missing, or the file is not a sound mesh.
        """
        file = found_inside(folder, self.path, "scenario")
        if isinstance(file, str):
            raise ScenarioError(f"{self.path}: {file}")
        try:
            import trimesh
        except ImportError as fault:
            raise ScenarioError(
                f"{self.path}: reading STL files needs trimesh, which is not installed; "
                "install it with: pip install 'driftwell[mesh]'"
            ) from fault
        try:
            read = trimesh.load_mesh(str(file), file_type="stl", process=False)
            vertices = np.asarray(read.vertices, dtype=np.float64) * self.unit
            triangles = np.asarray(read.faces, dtype=np.int64)
        except Exception as fault:  # as the library fails on what is no STL: by any kind
            raise ScenarioError(
                f"{self.path}: cannot be read; needs an STL file with triangles"
            ) from fault
        if triangles.ndim != 2 or not len(triangles) or not np.all(np.isfinite(vertices)):
            raise ScenarioError(f"{self.path}: needs triangles with finite corners")
        mesh = sewn([Patch(vertices, triangles)], closed=True)
        faults = mesh_faults(mesh)
        if faults:
            raise ScenarioError("\n".join(f"{self.path}: {fault}" for fault in faults))
        return (mesh,)

    def words(self) -> str:
        return f"as in the file {self.path}, in units of {spelled(self.unit, 'm')}"
