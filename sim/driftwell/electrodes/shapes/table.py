"""All kinds of shapes an electrode may have. A new kind is one new file and one entry here."""

from __future__ import annotations

from driftwell.electrodes.shapes.circle import Circle
from driftwell.electrodes.shapes.form import ShapeForm
from driftwell.electrodes.shapes.rectangle import Rectangle

DRAWN_KINDS: tuple[type[ShapeForm], ...] = (Rectangle, Circle)
"""Drawn in a plane."""
SPATIAL_KINDS: tuple[type[ShapeForm], ...] = ()
"""Bodies in space."""
SHAPE_KINDS = (*DRAWN_KINDS, *SPATIAL_KINDS)
