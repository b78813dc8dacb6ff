"""Electrodes in space: a hundred thousand panels solved, and what a map costs."""

from __future__ import annotations

import ctypes
import os
import resource
import time
from typing import Any

import numpy as np

from driftwell.boundary.drawn import solve_drawn
from driftwell.boundary.spatial_solver import solve_meshes
from driftwell.constants import COULOMB_CONSTANT
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.outline import Outline, outline, rectangle
from driftwell.geometry.revolution import half_circle
from driftwell.geometry.solid import Extruded, Frame

THREADS = min(2, os.cpu_count() or 1)
DIVISIONS = 92
"""Of a cube's edge: 101 568 panels."""
MAP_POINTS = 200_000
CUBE = 0.66067815
"""Capacitance of the cube in 4 pi eps0 sides (H.-O. Hwang and J. F. Douglas 2004; from memory)."""


def capacitance(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """Ball and concentric balls (drawn), cube (in space): seconds, memory, relative errors."""

    def ball(radius: float, solid: bool = True) -> Outline:
        return outline([half_circle(0.0, radius)], solid)

    solve_drawn([(ball(1.0),)], True, 1e-3)  # compiled, or read
    row: dict[str, Any] = {"reference": ""}
    for name, outlines, exact in (
        ("ball", [(ball(1.0),)], 1.0),
        ("concentric", [(ball(1.0),), (ball(2.0, solid=False),)], 2.0),
    ):
        began = time.perf_counter()
        found = solve_drawn(outlines, True, 1e-7).capacitance[0, 0] * COULOMB_CONSTANT
        row[f"seconds_of_{name}"] = time.perf_counter() - began
        row[f"relative_error_of_{name}"] = found / exact - 1.0
    square = rectangle((-0.5, -0.5), (0.5, 0.5))
    solve_meshes([mesh_of(Extruded(square, 0.5), 0.25)], THREADS)
    began = time.perf_counter()
    solved = solve_meshes([mesh_of(Extruded(square, 0.5), 1.0 / 24)], THREADS)
    row["seconds_of_cube"] = time.perf_counter() - began
    cube = solved.solution.capacitance[0, 0] * COULOMB_CONSTANT
    row["panels_of_cube"] = float(solved.panels)
    row["relative_error_of_cube"] = cube / CUBE - 1.0
    row["peak_gibibytes"] = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 2.0**20
    return row


def boundary_1e5(library: ctypes.CDLL, repeats: int) -> dict[str, Any]:
    """A cube of 1e5 panels and as many unknowns, off the mirror planes, and a map of its field."""
    square = rectangle((-0.5, -0.5), (0.5, 0.5))
    off = Frame(np.array([0.2, 0.3, 0.4]))
    # kernels are compiled, or read, with a small one
    small = mesh_of(Extruded(square, 0.5, off), 0.25)
    solve_meshes([small], THREADS, dense=0).solution.potential(np.zeros((100_000, 3)))
    began = time.perf_counter()
    mesh = mesh_of(Extruded(square, 0.5, off), 1.0 / DIVISIONS)
    cut = time.perf_counter()
    found = solve_meshes([mesh], THREADS)
    done = time.perf_counter()
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss
    points = np.random.default_rng(1).uniform(-1.5, 1.5, (MAP_POINTS, 3))
    evaluated = time.perf_counter()
    found.solution.potential_and_field(points)
    mapped = time.perf_counter()
    capacitance = found.solution.capacitance[0, 0] * COULOMB_CONSTANT
    return {
        "reference": "",
        "panels": float(found.panels),
        "unknowns": float(found.unknowns),
        "seconds_to_mesh": cut - began,
        "seconds_to_solve": done - cut,
        "peak_gibibytes": peak / 2.0**20,
        "iterations": float(found.iterations[0]),
        "relative_error_of_capacitance": capacitance / CUBE - 1.0,
        "points_a_second": MAP_POINTS / (mapped - evaluated),
    }
