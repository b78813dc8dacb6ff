"""What is wrong with electrodes taken together: kinds of shapes, the enclosure, bodies that meet.

Of drawn electrodes every stretch of every outline is looked at: one of half length l whose middle
is at a distance d > l of all other electrodes meets none; any other is halved, until it is shorter
than what counts as touching. Bodies in space are looked at in many points of their surfaces.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

from driftwell.electrodes.bodies import ENCLOSURE, enclosure_of, names_of, own_bodies
from driftwell.electrodes.form import Electrode, Electrodes
from driftwell.electrodes.shapes.form import Geometry
from driftwell.errors import DriftwellError
from driftwell.forms import spelled
from driftwell.forms.faults import Fault
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.geometry.distance import distances, plane_distances
from driftwell.geometry.outline import Outline
from driftwell.geometry.solid import Mesh, Solid
from driftwell.geometry.surface_points import outline_points, stretches, surface_points

TOUCHING = 1e-9
"""Electrodes nearer than this part of their size touch: no voltage could lie between them."""
_MOST_STRETCHES = 200_000

Floats = NDArray[np.float64]


def electrode_faults(
    electrodes: Electrodes | None, electrode: Sequence[Electrode], folder: Path
) -> list[Fault]:
    """Faults of all electrodes together; those of each on its own are known already."""
    if not electrode:
        return [] if electrodes is None else [_no_electrode()]
    common = electrodes or Electrodes()
    faults = [*_enclosure_faults(common), *_kind_faults(common, electrode)]
    if faults:
        return faults
    try:
        bodies = own_bodies(common, electrode, folder)
    except DriftwellError as fault:
        return [Fault(("electrode",), "", str(fault).splitlines()[0])]
    if common.geometry == "axisymmetric":
        faults = list(_axis_faults(bodies[: len(electrode)]))
    return faults or list(_meeting(common, names_of(electrodes, electrode), bodies))


def _no_electrode() -> Fault:
    return Fault(("electrodes",), "", "there is no [[electrode]] this could be about")


def _enclosure_faults(electrodes: Electrodes) -> Iterator[Fault]:
    can, geometry = electrodes.enclosure, electrodes.geometry
    if can is None:
        return
    needed = {
        "axisymmetric": ("radius", "length"),
        "planar": ("radius",),
        "spatial": ("size",),
    }[geometry]
    for name in ("radius", "length", "size"):
        given = getattr(can, name) is not None
        path = ("electrodes", ENCLOSURE, name)
        if name in needed and not given:
            yield Fault(path, "", f"missing; needed where the geometry is {geometry}")
        elif given and name not in needed:
            yield Fault(path, "", f"has no meaning where the geometry is {geometry}; leave it out")


def _kind_faults(electrodes: Electrodes, electrode: Sequence[Electrode]) -> Iterator[Fault]:
    geometry = electrodes.geometry
    for i, each in enumerate(electrode):
        if not each.shape:
            yield Fault(("electrode", i, "shape"), "", "empty; needs at least one shape")
        for k, shape in enumerate(each.shape):
            if shape.drawn() == (geometry == "spatial"):
                what = "is drawn in a plane" if shape.drawn() else "is a body in space"
                needs = "spatial" if not shape.drawn() else "axisymmetric or planar"
                text = f"{what}, and [electrodes] geometry is {geometry}; needs {needs}"
                yield Fault(("electrode", i, "shape", k), "", text)


def _axis_faults(bodies: Sequence[Sequence[Solid]]) -> Iterator[Fault]:
    for i, own in enumerate(bodies):
        for k, solid in enumerate(own):
            if isinstance(solid, Mesh):
                continue
            points = outline_points(solid.outline, 64)
            least, most = float(points[:, 0].min()), float(np.abs(points).max())
            if least < -TOUCHING * most:
                text = (
                    f"reaches {spelled(-least, 'm', 4)} beyond the axis, and is turned about it; "
                    "draw only what lies at r >= 0"
                )
                yield Fault(("electrode", i, "shape", k), "", text)


def _meeting(
    electrodes: Electrodes, names: Sequence[str], bodies: Sequence[Sequence[Solid]]
) -> Iterator[Fault]:
    """The first two electrodes that overlap or touch; else what lies outside the enclosure."""
    tiny = TOUCHING * _size(bodies)
    for i, own in enumerate(bodies):
        table = body_table([() if k == i else other for k, other in enumerate(bodies)])
        if not len(table.whole):
            return
        point, distance, k = _nearest(own, table, tiny, electrodes.geometry)
        if distance < tiny:
            how = "overlaps with" if distance < -tiny else "touches"
            where = ", ".join(spelled(float(x), "m", 4) for x in point)
            text = f'{how} "{names[k]}" at ({where}) of their own coordinates; leave a gap'
            enclosed = names[i] == ENCLOSURE
            yield Fault(("electrodes", ENCLOSURE) if enclosed else ("electrode", i), "", text)
            return
    if names[-1] == ENCLOSURE:
        yield from _outside(electrodes, bodies)


def _outside(electrodes: Electrodes, bodies: Sequence[Sequence[Solid]]) -> Iterator[Fault]:
    inner = body_table([[enclosure_of(electrodes, thin=False)]])
    for i, own in enumerate(bodies[:-1]):
        if any((distances(inner, surface_points(solid))[0] > 0.0).any() for solid in own):
            text = "lies outside [electrodes] enclosure; make that larger, or leave it out"
            yield Fault(("electrode", i), "", text)


def _size(bodies: Sequence[Sequence[Solid]]) -> float:
    return max(float(np.ptp(surface_points(s), axis=0).max()) for own in bodies for s in own)


def _nearest(
    own: Sequence[Solid], table: BodyTable, tiny: float, geometry: Geometry
) -> tuple[Floats, float, int]:
    """The point of an electrode nearest to the others, as far as they are looked for; whose."""
    found: list[tuple[Floats, float, int]] = []
    for solid in own:
        if geometry == "spatial" or isinstance(solid, Mesh):
            points = surface_points(solid)
            distance, owner = distances(table, points)
        else:
            points, distance, owner = _closely(solid.outline, table, tiny, geometry)
        least = int(np.argmin(distance))
        found.append((points[least], float(distance[least]), int(owner[least])))
    return min(found, key=lambda each: each[1])


def _closely(
    drawn: Outline, table: BodyTable, tiny: float, geometry: Geometry
) -> tuple[Floats, Floats, NDArray[np.int64]]:
    """Points of an outline with their distances to others, ever more where these are near."""
    parts = stretches(drawn)
    while True:
        points = parts.middles()
        distance, owner = plane_distances(table, points, geometry == "axisymmetric")
        near = distance < parts.halves() + tiny
        touching = distance.min() < tiny
        fine = not near.any() or float(parts.halves()[near].max()) < 0.1 * tiny
        if touching or fine or 2 * int(near.sum()) > _MOST_STRETCHES:
            return points, distance, owner
        parts = parts.halved(near)
