"""The solved field of a scenario's electrodes: unit solutions and their map, found or solved."""

from __future__ import annotations

import hashlib
import math
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import NDArray

from driftwell.boundary.drawn import DrawnSolution, solve_drawn
from driftwell.boundary.solution import Solution
from driftwell.boundary.spatial import SpatialSolution
from driftwell.boundary.spatial_solver import solve_spatial
from driftwell.electrodes.bodies import names_of, own_bodies
from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.fields.maps.build import build_map
from driftwell.fields.maps.potential_map import PotentialMap
from driftwell.geometry.body_table import HIGH, LOW, BodyTable, body_table
from driftwell.geometry.distance import distances, plane_distances
from driftwell.geometry.outline import Outline
from driftwell.geometry.solid import Mesh, Solid
from driftwell.kernels.threads import threads_now
from driftwell.solved.digest import field_digest
from driftwell.solved.region import Box, Distance, enclosed
from driftwell.solved.store import Arrays, Store, Told, store_folder

Floats = NDArray[np.float64]

DRAWN_SHARE, SPATIAL_SHARE = 0.1, 0.5
"""Part of the error asked for that the boundary solution may have; the map may have the rest."""
_PLACES, _BESIDE = 512, 0.1
"""Points at which solutions are compared; their distance from electrodes, of the largest."""
_SOLUTION, _MAP = "solution/", "map/"


@dataclass(frozen=True, slots=True)
class SolvedField:
    """Unit solutions of all electrodes, the enclosure last, in the electrodes' own coordinates.

    names : of the electrodes, and of the enclosure where there is one
    geometry : as in ``[electrodes]``
    solution : what the boundary solver found
    map : what the run steps in
    """

    names: tuple[str, ...]
    geometry: str
    solution: Solution
    map: PotentialMap

    @property
    def error(self) -> float:
        """Relative rms error of the field, beyond the map's clearance: of solution and map."""
        return math.hypot(self.solution.error, self.map.reached.rms)

    @property
    def digest(self) -> str:
        """Of the map's numbers: equal where a run goes on in the very same field."""
        return hashlib.sha256(self.map.coefficients.tobytes()).hexdigest()[:16]


def solved_field(
    electrodes: Electrodes,
    electrode: Sequence[Electrode],
    folder: Path,
    told: Told,
) -> SolvedField:
    """The solved field, from where it is kept, or solved now and kept.

    told : hears that it is solved, how well, and what could not be kept

    Runs on as many threads as `driftwell.kernels.threads.on_threads` allows.

    Raises DriftwellError where a shape cannot be made or solved; the text says why.
    """
    names = names_of(electrodes, electrode)
    digest = field_digest(electrodes, electrode, folder)
    store = Store(store_folder(), told)
    found = _taken_up(names, electrodes, store.found(digest))
    if found is not None:
        return found
    with store.alone(digest):
        found = _taken_up(names, electrodes, store.found(digest))
        if found is None:
            number = len(electrode)
            told(f"Solving the field of {number} electrode{'s' * (number != 1)}, to be kept.")
            found = _solved(names, electrodes, own_bodies(electrodes, electrode, folder))
            told(f"Solved: {found.map.reached.words()}.")
            store.keep(digest, _arrays(found))
    return found


def is_kept(electrodes: Electrodes, electrode: Sequence[Electrode], folder: Path) -> bool:
    """Whether the field was solved before, and is kept."""
    digest = field_digest(electrodes, electrode, folder)
    return Store(store_folder(), lambda _: None).keeps(digest)


def _solved(
    names: tuple[str, ...], electrodes: Electrodes, bodies: Sequence[Sequence[Solid]]
) -> SolvedField:
    """Solve Laplace's equation, and map the solution."""
    geometry = electrodes.geometry
    table = body_table(bodies)
    depth = distance_of(table, geometry)
    box = region_of(electrodes, depth, _around(table, geometry))
    solution: Solution
    if geometry == "spatial":
        enclosure = bodies[-1] if electrodes.enclosure is not None else ()
        own = bodies[:-1] if electrodes.enclosure is not None else bodies
        accuracy = SPATIAL_SHARE * electrodes.field_accuracy
        solution = solve_spatial(own, accuracy, threads_now(), enclosure, _places(box, depth))
    else:
        outlines = [tuple(_outline(solid) for solid in each) for each in bodies]
        accuracy = DRAWN_SHARE * electrodes.field_accuracy
        solution = solve_drawn(outlines, geometry == "axisymmetric", accuracy)
    mapped = build_map(
        tuple(zip(box.low.tolist(), box.high.tolist(), strict=True)),
        solution,
        electrodes.field_accuracy,
        geometry=geometry,
        mirrors=_even(solution.mirrors, box, geometry),
        depth=depth,
        judged="rms",
    )
    return SolvedField(names, geometry, solution, mapped)


def distance_of(table: BodyTable, geometry: str) -> Distance:
    """Signed distance of points in the map's coordinates to the nearest electrode."""
    return lambda points: nearest(table, geometry, points)[0]


def nearest(table: BodyTable, geometry: str, points: Floats) -> tuple[Floats, NDArray[np.int64]]:
    """Signed distances (n,), m, of points in the map's coordinates to the nearest electrode, and
    whose it is (n,)."""
    if geometry == "spatial":
        return distances(table, points)
    return plane_distances(table, points, geometry == "axisymmetric")


def region_of(electrodes: Electrodes, distance: Distance, around: Box) -> Box:
    """The region of the map: what the scenario says of it, and for the rest what is enclosed.

    around : the box of all electrodes
    """
    axisymmetric = electrodes.geometry == "axisymmetric"
    found = enclosed(distance, around, axisymmetric)
    low, high = found.low.copy(), found.high.copy()
    asked = electrodes.region
    if asked is not None:
        pairs = [asked.x, asked.y, asked.z]
        if axisymmetric:
            pairs = [None if asked.r is None else (0.0, asked.r), asked.z]
        for axis, pair in enumerate(pairs[: len(low)]):
            if pair is not None:
                low[axis], high[axis] = pair
    return Box(low, high)


def _around(table: BodyTable, geometry: str) -> Box:
    """The box of all electrodes in the map's coordinates."""
    low = table.number[:, LOW : LOW + 3].min(axis=0)
    high = table.number[:, HIGH : HIGH + 3].max(axis=0)
    axes = {"axisymmetric": [0, 2], "planar": [0, 1], "spatial": [0, 1, 2]}[geometry]
    low, high = low[axes], high[axes]
    if geometry == "axisymmetric":
        low[0] = 0.0
    return Box(low, high)


def _places(box: Box, depth: Distance) -> Floats:
    """Points of the region, outside electrodes, at which solutions in space are compared."""
    drawn = np.random.default_rng(2).random((4 * _PLACES, len(box.low)))
    points = box.low + drawn * (box.high - box.low)
    distance = depth(points)
    return np.asarray(points[distance > _BESIDE * distance.max()][:_PLACES])


def _even(mirrors: tuple[bool, ...], box: Box, geometry: str) -> tuple[bool, ...]:
    """Where the map may hold one half: in the coordinates whose region reaches across 0."""
    across = tuple(bool(low < 0.0 < high) for low, high in zip(*box, strict=True))
    even = tuple(m and a for m, a in zip(mirrors, across, strict=True))
    return (True, *even[1:]) if geometry == "axisymmetric" else even


def _outline(solid: Solid) -> Outline:
    if isinstance(solid, Mesh):
        raise TypeError("a mesh is not drawn in a plane")
    return solid.outline


def _arrays(field: SolvedField) -> Arrays:
    solution = {f"{_SOLUTION}{name}": each for name, each in field.solution.arrays().items()}
    return {**solution, **{f"{_MAP}{name}": each for name, each in field.map.arrays().items()}}


def _taken_up(
    names: tuple[str, ...], electrodes: Electrodes, arrays: Mapping[str, NDArray[Any]] | None
) -> SolvedField | None:
    """The field that was kept; None where nothing was."""
    if arrays is None:
        return None
    kind: Callable[[Arrays], Solution] = DrawnSolution.from_arrays
    if electrodes.geometry == "spatial":
        kind = SpatialSolution.from_arrays
    return SolvedField(
        names,
        electrodes.geometry,
        kind(_below(_SOLUTION, arrays)),
        PotentialMap.from_arrays(_below(_MAP, arrays)),
    )


def _below(start: str, arrays: Mapping[str, NDArray[Any]]) -> Arrays:
    return {
        name.removeprefix(start): each for name, each in arrays.items() if name.startswith(start)
    }
