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
from driftwell.boundary.spatial_solution import SpatialSolution, solve_spatial
from driftwell.electrodes.bodies import bodies_of
from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.fields.maps.build import build_map
from driftwell.fields.maps.potential_map import PotentialMap
from driftwell.forms import spelled
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.geometry.distance import distances, plane_distances
from driftwell.geometry.solid import Solid
from driftwell.solved.digest import field_digest
from driftwell.solved.region import Box, Distance, enclosed
from driftwell.solved.store import Arrays, Store, Told, store_folder

Floats = NDArray[np.float64]

ENCLOSURE = "enclosure"
"""What the grounded can is called where there is one; it comes after all electrodes."""
_BOUNDARY_SHARE = 0.1
"""Part of the error asked for that the boundary solution may have; the map may have the rest."""
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

    def where(self) -> str:
        """The region of the map in words, in the electrodes' own coordinates."""
        names = {"axisymmetric": "rz", "planar": "xy", "spatial": "xyz"}[self.geometry]
        return ", ".join(
            f"r up to {spelled(high, 'm', 4)}"
            if name == "r"
            else f"{name} from {spelled(low, 'm', 4)} to {spelled(high, 'm', 4)}"
            for name, (low, high) in zip(names, self.map.region(), strict=True)
        )


def solved_field(
    electrodes: Electrodes,
    electrode: Sequence[Electrode],
    folder: Path,
    told: Told,
) -> SolvedField:
    """The solved field, from where it is kept, or solved now and kept.

    told : hears that it is solved, how long that took, and what could not be kept

    Raises ScenarioError where a shape cannot be made, as from a file.
    """
    names = tuple(each.name for each in electrode) + (ENCLOSURE,) * bool(electrodes.enclosure)
    digest = field_digest(electrodes, electrode, folder)
    store = Store(store_folder(), told)
    found = _taken_up(names, electrodes, store.found(digest))
    if found is not None:
        return found
    with store.alone(digest):
        found = _taken_up(names, electrodes, store.found(digest))
        if found is None:
            told(f"Solving the field of {len(names)} electrode{'s' * (len(names) != 1)}.")
            found = _solved(names, electrodes, bodies_of(electrodes, electrode, folder))
            told(f"Solved: {found.map.reached.words()}.")
            store.keep(digest, _arrays(found))
    return found


def _solved(
    names: tuple[str, ...], electrodes: Electrodes, bodies: Sequence[Sequence[Solid]]
) -> SolvedField:
    """Solve Laplace's equation, and map the solution."""
    geometry = electrodes.geometry
    solution: Solution
    accuracy = _BOUNDARY_SHARE * electrodes.field_accuracy
    if geometry == "spatial":
        solution = solve_spatial(bodies, accuracy)
    else:
        outlines = [tuple(solid.outline for solid in each) for each in bodies]  # type: ignore[union-attr]
        solution = solve_drawn(outlines, geometry == "axisymmetric", accuracy)
    depth = distance_of(body_table(bodies), geometry)
    box = region_of(electrodes, depth, solution)
    mapped = build_map(
        tuple(zip(box.low.tolist(), box.high.tolist(), strict=True)),
        solution,
        electrodes.field_accuracy,
        geometry=geometry,
        mirrors=solution.mirrors,
        depth=depth,
    )
    return SolvedField(names, geometry, solution, mapped)


def distance_of(table: BodyTable, geometry: str) -> Distance:
    """Signed distance of points in the map's coordinates to the nearest electrode."""
    if geometry == "spatial":
        return lambda points: distances(table, points)[0]
    return lambda points: plane_distances(table, points, geometry == "axisymmetric")[0]


def region_of(electrodes: Electrodes, distance: Distance, solution: Solution) -> Box:
    """The region of the map: what the scenario says of it, and for the rest what is enclosed."""
    panels = solution.panels.position
    found = enclosed(
        distance, Box(panels.min(axis=0), panels.max(axis=0)), electrodes.geometry == "axisymmetric"
    )
    low, high = found.low.copy(), found.high.copy()
    asked = electrodes.region
    if asked is not None:
        pairs = [asked.x, asked.y, asked.z]
        if electrodes.geometry == "axisymmetric":
            pairs = [None if asked.r is None else (0.0, asked.r), asked.z]
        for axis, pair in enumerate(pairs[: len(low)]):
            if pair is not None:
                low[axis], high[axis] = pair
    return Box(low, high)


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
