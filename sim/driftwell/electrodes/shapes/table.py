"""All kinds of shapes an electrode may have. A new kind is one new file and one entry here."""

from __future__ import annotations

from driftwell.electrodes.shapes.box import Box
from driftwell.electrodes.shapes.circle import Circle
from driftwell.electrodes.shapes.cone import Cone
from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.hyperbola import Hyperbola
from driftwell.electrodes.shapes.mesh import Mesh
from driftwell.electrodes.shapes.path import Path
from driftwell.electrodes.shapes.plate import Plate
from driftwell.electrodes.shapes.quadro_logarithmic import QuadroLogarithmic
from driftwell.electrodes.shapes.rectangle import Rectangle
from driftwell.electrodes.shapes.ring import Ring
from driftwell.electrodes.shapes.rod import Rod
from driftwell.electrodes.shapes.sphere import Sphere
from driftwell.electrodes.shapes.tube import Tube
from driftwell.electrodes.shapes.wire import Wire

DRAWN_KINDS: tuple[type[ShapeForm], ...] = (
    Rectangle,
    Circle,
    Path,
    Hyperbola,
    QuadroLogarithmic,
)
"""Drawn in a plane."""
SPATIAL_KINDS: tuple[type[ShapeForm], ...] = (
    Box,
    Plate,
    Rod,
    Tube,
    Ring,
    Sphere,
    Cone,
    Wire,
    Mesh,
)
"""Bodies in space."""
SHAPE_KINDS = (*DRAWN_KINDS, *SPATIAL_KINDS)
