"""Electrodes in space: a hundred thousand panels solved, and what a map costs."""

from __future__ import annotations

import ctypes
import os
import resource
import time
from typing import Any

import numpy as np

from driftwell.boundary.spatial_solver import solve_meshes
from driftwell.constants import COULOMB_CONSTANT
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.outline import rectangle
from driftwell.geometry.solid import Extruded, Frame

THREADS = min(2, os.cpu_count() or 1)
DIVISIONS = 92
"""Of a cube's edge: 101 568 panels."""
MAP_POINTS = 200_000
CUBE = 0.66067815
"""Capacitance of the cube in 4 pi eps0 sides (H.-O. Hwang and J. F. Douglas 2004; from memory)."""


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
