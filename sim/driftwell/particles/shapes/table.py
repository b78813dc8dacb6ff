"""All kinds of shapes a cloud may have. A new kind is one new file and one entry here."""

from __future__ import annotations

from driftwell.particles.shapes.ball import Ball, Ellipsoid
from driftwell.particles.shapes.beam import BeamGaussian, BeamKV, BeamParabolic, BeamWaterbag
from driftwell.particles.shapes.box import Box
from driftwell.particles.shapes.cylinder import Cylinder
from driftwell.particles.shapes.file import FromFile
from driftwell.particles.shapes.form import ShapeForm
from driftwell.particles.shapes.gaussian import Gaussian
from driftwell.particles.shapes.line import Line
from driftwell.particles.shapes.points import Points
from driftwell.particles.shapes.ring import Ring

SHAPE_KINDS: tuple[type[ShapeForm], ...] = (
    Points,
    Line,
    Ring,
    Gaussian,
    Ball,
    Ellipsoid,
    Cylinder,
    Box,
    BeamKV,
    BeamWaterbag,
    BeamParabolic,
    BeamGaussian,
    FromFile,
)
