"""What every shape of an electrode declares, and the bodies it gives."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from driftwell.forms import Form
from driftwell.forms.faults import Fault
from driftwell.geometry.outline import Outline
from driftwell.geometry.solid import Solid

Geometry = Literal["axisymmetric", "planar", "spatial"]
"""About z, coordinates (r, z); the same at every z, coordinates (x, y); three-dimensional."""


class ShapeForm(Form):
    """Base of all shapes. A shape is drawn in a plane (`outline`), or in space (`solids`)."""

    def drawn(self) -> bool:
        """Whether the shape is drawn in a plane: for axisymmetric and planar electrodes."""
        return False

    def outline(self, geometry: Geometry) -> Outline:
        """Of a drawn shape: in (r, z) or (x, y), m."""
        raise TypeError(f"{type(self).__name__} is not drawn in a plane")

    def faults(self, geometry: Geometry) -> list[Fault]:
        """Of a drawn shape: what does not suit this geometry; paths count from the shape."""
        return []

    def solids(self, folder: Path) -> tuple[Solid, ...]:
        """Of a shape in space: its bodies; files that are named count from `folder`."""
        raise TypeError(f"{type(self).__name__} is drawn in a plane")

    def files_named(self) -> tuple[str, ...]:
        """Files the shape reads, relative to the scenario's folder."""
        return ()

    def words(self) -> str:
        """The shape in words."""
        raise TypeError(f"{type(self).__name__} must describe itself")
