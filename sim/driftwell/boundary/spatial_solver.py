"""Electrodes in space solved, as finely as asked.

Bodies are cut coarsely, solved, cut finer by a factor and solved again, until the two solutions
agree, at points between the electrodes, within the accuracy wanted. The difference is
what the finer one is said to err by; its true error is smaller, about by half.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from driftwell.boundary.closeness import closest_for_their_size
from driftwell.boundary.mirror_orbits import mirror_orbits
from driftwell.boundary.panel_bounds import bounds_of, count_near
from driftwell.boundary.spatial import SpatialSolution
from driftwell.boundary.spatial_equations import DENSE, NotFoundError, solved
from driftwell.boundary.triangle import panel_rows
from driftwell.constants import COULOMB_CONSTANT
from driftwell.errors import DriftwellError
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.solid import Mesh, Solid
from driftwell.geometry.winding import winding

Floats = NDArray[np.float64]
Ints = NDArray[np.int64]

COARSEST, FINER = 4.0, 1.5
"""Edges along a body's mean extent at first, and by what factor they become more."""
MOST_PANELS = 100_000
GRADE = 3.0
"""Power of the spacing of points towards edges, where it was found to serve best (boundary-3d)."""
_TURN = 2.5
"""Largest turn of a curved surface from edge to edge, rad, times the edges of an extent."""
_GROWN = 1.4
"""Least growth of the number of panels from one solution to the next."""
_ROUNDS = 16
_PLACES, _FEWEST_PLACES = 512, 32
_AROUND, _BESIDE = 1.2, 0.5
"""Box of the places: parts of the electrodes' own along each axis, and of its longest side."""
_CLEAR = 1.0
"""Distance of the places from panels' middles, in longest sides."""


class SolvedSpatial(NamedTuple):
    """A solution and what it took.

    panels, unknowns : their numbers; iterations : of each electrode, 0 where factors were used
    """

    solution: SpatialSolution
    panels: int
    unknowns: int
    iterations: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Surfaces:
    """Triangles of all electrodes.

    corners : (k, 3, 3), m; electrode : (k,), whose each is; closed : (k,), of a closed body
    electrodes : their number; panels of that number are always at 0 V
    """

    corners: Floats
    electrode: Ints
    closed: NDArray[np.bool_]
    electrodes: int


def joined(parts: Sequence[tuple[int, Mesh]], electrodes: int) -> Surfaces:
    """Meshes, each with the number of its electrode, as one."""
    lengths = [len(mesh.triangles) for _, mesh in parts]
    return Surfaces(
        np.concatenate([mesh.vertices[mesh.triangles] for _, mesh in parts]),
        np.repeat(np.array([number for number, _ in parts], dtype=np.int64), lengths),
        np.repeat([mesh.closed for _, mesh in parts], lengths),
        electrodes,
    )


def solve_meshes(
    meshes: Sequence[Mesh],
    threads: int = 1,
    grounded: Sequence[Mesh] = (),
    dense: int = DENSE,
) -> SolvedSpatial:
    """Unit solutions of one mesh for each electrode; `grounded` ones are at 0 V throughout.

    The solution's error is not known, and NaN. Raises DriftwellError where electrodes touch.
    """
    parts = [*enumerate(meshes), *((len(meshes), mesh) for mesh in grounded)]
    return _solved(joined(parts, len(meshes)), threads, dense)


def solve_spatial(
    bodies: Sequence[Sequence[Solid]],
    accuracy: float = 1e-4,
    threads: int = 1,
    enclosure: Sequence[Solid] = (),
    places: Floats | None = None,
    most_panels: int = MOST_PANELS,
) -> SpatialSolution:
    """Unit solutions of electrodes, each of one body or several.

    accuracy : largest rms difference wanted between two solutions of growing fineness, of
        potentials, and of fields relative to the rms of all electrodes' fields, over `places`
    enclosure : bodies around all, at 0 V; their edges, which open inwards, are not graded
    places : (n, 3), m, where the field is wanted; left out: spread over the box about `bodies`.
        Those inside bodies, or within a panel's size of one, are passed over
    most_panels : where refinement ends whatever the difference; the solution's error tells

    Raises DriftwellError where bodies touch or cannot be cut into triangles.
    """
    asked: Floats | None = None
    before: SpatialSolution | None = None
    fineness = COARSEST
    for _ in range(_ROUNDS):
        surfaces = cut(bodies, enclosure, fineness)
        fineness *= FINER
        if before is not None and len(surfaces.corners) < _GROWN * len(before.corners):
            continue  # even numbers of edges may stay the same: nothing to compare
        if before is not None and len(surfaces.corners) > most_panels:
            break
        found = _solved(surfaces, threads, DENSE).solution
        if asked is None:
            wanted = (
                _spread_places(surfaces)
                if places is None or not len(places)
                else np.asarray(places, dtype=np.float64)
            )
            asked = _outside(surfaces, wanted)
        if before is not None:
            found = replace(found, error=difference(before, found, _clear(surfaces, asked)))
            if found.error <= accuracy:
                return found
        before = found
    if before is None or not math.isfinite(before.error):
        raise DriftwellError(
            f"the electrodes take more than {most_panels} triangles; needs fewer or simpler "
            "bodies, or a mesh with fewer triangles."
        )
    return before


def cut(bodies: Sequence[Sequence[Solid]], enclosure: Sequence[Solid], fineness: float) -> Surfaces:
    """All bodies as triangles, `fineness` edges along the root of half a body's surface."""
    turn = min(_TURN / fineness, math.pi / 4.0)
    parts: list[tuple[int, Mesh]] = []
    for number, solids in enumerate([*bodies, enclosure]):
        grade = GRADE if number < len(bodies) else 1.0
        sizes = [_extent(solid) / fineness for solid in solids]
        try:
            parts += [
                (number, mesh_of(solid, size, turn, grade, fair=True))
                for solid, size in zip(solids, sizes, strict=True)
            ]
        except ValueError as fault:
            raise DriftwellError(
                f"electrode {number + 1}: {fault}; needs holes that keep clear of each other and "
                "of edges, and corners that are not too sharp."
            ) from fault
    return joined(parts, len(bodies))


def difference(coarse: SpatialSolution, fine: SpatialSolution, places: Floats) -> float:
    """The larger of the rms differences of potentials, and of fields in parts of their rms."""
    potential = fine.potential(places) - coarse.potential(places)
    field = fine.field(places)
    change = np.sqrt(np.mean(np.sum((field - coarse.field(places)) ** 2, axis=2), axis=1))
    whole = math.sqrt(float(np.mean(np.sum(field**2, axis=2))))
    return max(
        float(np.max(np.sqrt(np.mean(potential**2, axis=1)))),
        float(np.max(change)) / whole if whole > 0.0 else 0.0,
    )


def _solved(surfaces: Surfaces, threads: int, dense: int) -> SolvedSpatial:
    surfaces = _without_doubles(surfaces)
    rows = panel_rows(surfaces.corners)
    orbits = mirror_orbits(rows[:, 23:26], rows[:, 21], rows[:, 22], surfaces.electrode)
    owner = surfaces.electrode[orbits.first]
    wanted = (owner[:, None] == np.arange(surfaces.electrodes)).astype(np.float64)
    try:
        found = solved(rows, orbits, wanted, threads, dense)
    except NotFoundError as fault:
        raise DriftwellError(f"{fault}. {_remedy(surfaces)}") from fault
    density = np.ascontiguousarray(found.density[orbits.group].T) / COULOMB_CONSTANT
    charge = density * rows[:, 21]
    capacitance = np.stack(
        [charge[:, surfaces.electrode == e].sum(axis=1) for e in range(surfaces.electrodes)]
    )
    solution = SpatialSolution(
        surfaces.corners,
        surfaces.electrode,
        density,
        capacitance,
        math.nan,
        orbits.mirrors,
        threads,
    )
    return SolvedSpatial(solution, len(rows), len(orbits.first), found.iterations)


def _remedy(surfaces: Surfaces) -> str:
    """Where surfaces are too close for their triangles, and what to do."""
    found = closest_for_their_size(surfaces.corners, surfaces.electrode)
    if found is None:
        return "Needs surfaces that do not cross: join what overlaps in one outline or mesh."
    one, other = (
        "the enclosure" if number == surfaces.electrodes else f"electrode {number + 1}"
        for number in (found.first, found.second)
    )
    place = ", ".join(f"{1e3 * each:.4g}" for each in found.place)
    return (
        f"Closest for their size are {one} and {other}: {1e3 * found.distance:.3g} mm apart at "
        f"({place}) mm, where a triangle of {other} is {1e3 * found.longest:.3g} mm long. Move "
        "them apart by about that length, join them in one electrode, or leave the smaller out."
    )


def _without_doubles(surfaces: Surfaces) -> Surfaces:
    """One of each two triangles that coincide, where bodies of one electrode share a face."""
    corners = surfaces.corners
    middle = corners.mean(axis=1)
    scale = float(np.max(np.ptp(middle, axis=0))) * 1e-9
    key = np.round(middle / scale)
    _, first, which = np.unique(key, axis=0, return_index=True, return_inverse=True)
    if len(first) == len(middle):
        return surfaces
    owner = surfaces.electrode
    if np.any(owner[first][which.reshape(-1)] != owner):
        raise DriftwellError(
            "two electrodes share a face, so they cannot have voltages of their own; "
            "needs a gap between them."
        )
    kept = np.sort(first)
    return Surfaces(corners[kept], owner[kept], surfaces.closed[kept], surfaces.electrodes)


def _extent(solid: Solid) -> float:
    """The root of half a body's surface, m: of a cube a little less than twice its side."""
    rough = mesh_of(solid, math.inf, math.pi / 4.0, 1.0)
    corners = rough.vertices[rough.triangles]
    sides = corners[:, 1:] - corners[:, :1]
    area = 0.5 * float(np.sum(np.linalg.norm(np.cross(sides[:, 0], sides[:, 1]), axis=1)))
    return math.sqrt(0.5 * area)


def _spread_places(surfaces: Surfaces) -> Floats:
    """Points spread evenly about all electrodes, (n, 3), m."""
    from scipy.stats import qmc

    vertices = surfaces.corners[surfaces.electrode < surfaces.electrodes].reshape(-1, 3)
    low, high = vertices.min(axis=0), vertices.max(axis=0)
    reach = _AROUND * (high - low) + _BESIDE * np.max(high - low)
    points = qmc.Sobol(3, scramble=False).random(_PLACES)
    return np.asarray(0.5 * (low + high) + (points - 0.5) * reach)


def _outside(surfaces: Surfaces, points: Floats) -> Floats:
    """Those of the points outside bodies and inside the enclosure; all if there are none."""
    own = surfaces.electrode < surfaces.electrodes
    outside = winding(surfaces.corners[own & surfaces.closed], points) < 0.5
    around = surfaces.closed & ~own
    if np.any(around):
        outside &= np.abs(winding(surfaces.corners[around], points)) > 0.5
    return np.ascontiguousarray(points[outside] if np.any(outside) else points)


def _clear(surfaces: Surfaces, points: Floats) -> Floats:
    """Those of the points that are not next to panels; all where they would be few."""
    rows = panel_rows(surfaces.corners)
    tree = bounds_of(np.ascontiguousarray(rows[:, 23:26]), _CLEAR * rows[:, 22])
    near = np.zeros(len(points), dtype=np.int64)
    count_near(points, np.zeros(len(points)), tree, near)
    clear = near == 0
    return np.ascontiguousarray(points[clear] if clear.sum() >= _FEWEST_PLACES else points)
