"""All kinds of shapes an electrode may have. A new kind is one new file and one entry here."""

from __future__ import annotations

from driftwell.electrodes.shapes.circle import Circle
from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.hyperbola import Hyperbola
from driftwell.electrodes.shapes.path import Path
from driftwell.electrodes.shapes.quadro_logarithmic import QuadroLogarithmic
from driftwell.electrodes.shapes.rectangle import Rectangle

DRAWN_KINDS: tuple[type[ShapeForm], ...] = (
    Rectangle,
    Circle,
    Path,
    Hyperbola,
    QuadroLogarithmic,
)
"""Drawn in a plane."""
SPATIAL_KINDS: tuple[type[ShapeForm], ...] = ()
"""Bodies in space."""
SHAPE_KINDS = (*DRAWN_KINDS, *SPATIAL_KINDS)
