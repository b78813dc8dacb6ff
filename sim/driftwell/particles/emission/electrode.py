"""Charges from the surface of an electrode, uniform over its area or a part of it.

The bodies are cut into triangles; those at the border of the part that emits are cut again until
they are a 256th of it. A charge's place on its triangle is then moved to the surface itself,
along the slope of the distance from it, which is the surface's normal.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import Literal, Self

import numpy as np

from driftwell.errors import ScenarioError
from driftwell.forms import Direction, Form, Length, Name, Positive, checked, key, refuse
from driftwell.forms.body import Body
from driftwell.geometry.body_table import BodyTable, body_table
from driftwell.geometry.distance import distances
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.solid import Extruded, Mesh, Solid
from driftwell.particles.draws import Draws
from driftwell.particles.emission.form import LIFT, EmitterForm, Leaving
from driftwell.particles.proper_velocity import Floats

_FINE = 1.0 / 24.0
"""Size of triangles, as part of a body's extent."""
_TURN = math.pi / 48.0
"""Largest angle between neighbouring triangles of a curved surface, rad."""
_BORDER = 1.0 / 256.0
"""Size of triangles at the border of the part that emits, as part of its size."""
_PROBE = 1e-5
"""Half the length over which the distance's slope is taken, as part of the extent."""


class EmittingPart(Form):
    """A part of space: what lies in it of an electrode's surface emits."""

    r: Positive[Length] | None = key("largest distance from the z axis", default=None)
    x: tuple[Length, Length] | None = key("from and to along x", default=None)
    y: tuple[Length, Length] | None = key("from and to along y", default=None)
    z: tuple[Length, Length] | None = key("from and to along z", default=None)

    @checked
    def _ordered(self) -> Self:
        for name in ("x", "y", "z"):
            pair = getattr(self, name)
            if pair is not None and not pair[0] < pair[1]:
                raise refuse(f"the first number of `{name}` must be less than the second")
        return self

    def depth(self, points: Floats) -> Floats:
        """How far points (n, 3) are within, m; negative outside."""
        found = np.full(len(points), np.inf)
        if self.r is not None:
            found = self.r - np.hypot(points[:, 0], points[:, 1])
        for axis, pair in enumerate((self.x, self.y, self.z)):
            if pair is not None:
                within = np.minimum(points[:, axis] - pair[0], pair[1] - points[:, axis])
                found = np.minimum(found, within)
        return found

    def size(self) -> float:
        """Its smallest length, m; infinite where it has none."""
        pairs = [pair[1] - pair[0] for pair in (self.x, self.y, self.z) if pair is not None]
        return min([*pairs, math.inf if self.r is None else 2.0 * self.r])


class ElectrodeEmitter(EmitterForm):
    """The surface of an electrode."""

    kind: Literal["electrode"]
    electrode: Name = key("name of the electrode")
    part: EmittingPart | None = key("the part of it that emits; left out: all of it", default=None)
    facing: Direction | None = key(
        "only what faces this direction emits, to within a right angle; needed for thin sheets",
        default=None,
    )

    def electrode_named(self) -> str | None:
        return self.electrode

    def has_area(self) -> bool:
        return True

    def area(self, solids: Sequence[Solid]) -> float:
        return float(_areas(self._triangles(solids)[0]).sum())

    def leave(
        self, count: int, draws: Draws, body: Body, solids: Sequence[Solid], folder: Path
    ) -> Leaving:
        corners, normals, curved = self._triangles(solids)
        points = draws.unit_points("place", count, 3)
        reached = np.cumsum(_areas(corners))
        which = np.searchsorted(reached, points[0] * reached[-1]).clip(max=len(reached) - 1)
        root = np.sqrt(points[1])
        share = np.stack([1.0 - root, root * (1.0 - points[2]), root * points[2]], axis=1)
        place = np.einsum("nk,nka->na", share, corners[which])
        normal = normals[which]
        extent = float(np.ptp(corners.reshape(-1, 3), axis=0).max())
        bent = np.flatnonzero(curved[which])
        if bent.size:
            place[bent], normal[bent] = _on_surface(
                body_table([tuple(solids)]), place[bent], normal[bent], extent
            )
        place = place + LIFT * extent * normal
        return Leaving(np.ascontiguousarray(place.T), np.ascontiguousarray(normal.T))

    def words(self) -> str:
        part = "" if self.part is None else "a part of "
        return f'from {part}electrode "{self.electrode}"'

    def _triangles(self, solids: Sequence[Solid]) -> tuple[Floats, Floats, Floats]:
        """What emits: corners (k, 3, 3), outward normals (k, 3), whether it stands for a curve."""
        corners, bent = [], []
        for solid in solids:
            mesh = self._mesh(solid)
            corners.append(mesh.vertices[mesh.triangles])
            bent.append(np.full(len(mesh.triangles), not isinstance(solid, Mesh) and mesh.closed))
        found, curved = np.concatenate(corners), np.concatenate(bent)
        across = np.cross(found[:, 1] - found[:, 0], found[:, 2] - found[:, 0])
        twice = np.linalg.norm(across, axis=1)
        sound = twice > 0.0
        found, curved = found[sound], curved[sound]
        normal = across[sound] / twice[sound, None]
        if self.facing is not None:
            ahead = normal @ np.array(self.facing)
            thin = (
                ~curved
                & np.repeat(
                    [not _bounds(solid) for solid in solids], [len(each) for each in corners]
                )[sound]
            )
            normal = np.where((thin & (ahead < 0.0))[:, None], -normal, normal)
            kept = (ahead > 0.0) | (thin & (ahead != 0.0))
            found, normal, curved = found[kept], normal[kept], curved[kept]
        elif not all(_bounds(solid) for solid in solids):
            raise ScenarioError(
                f'electrode "{self.electrode}" has a thin sheet: `facing` must say which face emits'
            )
        if self.part is not None:
            found, which = _cut_to(found, self.part)
            normal, curved = normal[which], curved[which]
        if not len(found):
            raise ScenarioError(f'no surface of electrode "{self.electrode}" is left to emit')
        return found, normal, curved

    def _mesh(self, solid: Solid) -> Mesh:
        if isinstance(solid, Extruded) and math.isinf(solid.half_length):
            if self.part is None or self.part.z is None:
                raise ScenarioError(
                    f'electrode "{self.electrode}" has no end: `part` must say from where to '
                    "where along z it emits"
                )
            middle = solid.frame.origin[2]
            reach = max(abs(each - middle) for each in self.part.z)
            solid = replace(solid, half_length=1.25 * reach)
        if isinstance(solid, Mesh):
            return solid
        extent = float(np.ptp(solid.outline.pieces[:, :4]))
        try:
            return mesh_of(solid, _FINE * extent, _TURN, grade=1.0)
        except ValueError as fault:
            raise ScenarioError(
                f'electrode "{self.electrode}" cannot be cut into triangles ({fault})'
            ) from fault


def _bounds(solid: Solid) -> bool:
    """Whether a body bounds a volume."""
    if isinstance(solid, Mesh):
        return solid.closed
    flat = isinstance(solid, Extruded) and solid.half_length == 0.0
    return solid.outline.solid and not flat


def _areas(corners: Floats) -> Floats:
    across = np.cross(corners[:, 1] - corners[:, 0], corners[:, 2] - corners[:, 0])
    return np.asarray(0.5 * np.linalg.norm(across, axis=1))


def _cut_to(corners: Floats, part: EmittingPart) -> tuple[Floats, Floats]:
    """Triangles within a part of space, and which of the given ones each is a piece of."""
    which = np.arange(len(corners))
    kept, whose = [], []
    while len(corners):
        middle = corners.mean(axis=1)
        reach = np.linalg.norm(corners - middle[:, None], axis=2).max(axis=1)
        depth = part.depth(middle)
        small = reach < _BORDER * part.size()
        inside = (depth >= reach) | (small & (depth >= 0.0))
        kept.append(corners[inside])
        whose.append(which[inside])
        cut = ~inside & ~small & (depth > -reach)
        corners, which = _quartered(corners[cut]), np.tile(which[cut], 4)
    return np.concatenate(kept), np.concatenate(whose)


def _quartered(corners: Floats) -> Floats:
    a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
    ab, bc, ca = 0.5 * (a + b), 0.5 * (b + c), 0.5 * (c + a)
    pieces = ((a, ab, ca), (ab, b, bc), (ca, bc, c), (ab, bc, ca))
    return np.concatenate([np.stack(piece, axis=1) for piece in pieces])


def _on_surface(
    bodies: BodyTable, place: Floats, facet: Floats, extent: float
) -> tuple[Floats, Floats]:
    """Places moved to the bodies' own surface, with its normals; at edges the facets'."""
    probe = _PROBE * extent
    slope = np.empty_like(place)
    for axis in range(3):
        step = np.zeros(3)
        step[axis] = probe
        ahead, _ = distances(bodies, place + step)
        behind, _ = distances(bodies, place - step)
        slope[:, axis] = (ahead - behind) / (2.0 * probe)
    size = np.linalg.norm(slope, axis=1)
    sound = (np.abs(size - 1.0) < 1e-3) & ((slope * facet).sum(axis=1) > 0.9 * size)
    normal = np.where(sound[:, None], slope / np.where(sound, size, 1.0)[:, None], facet)
    away, _ = distances(bodies, place)
    return place - away[:, None] * normal, normal
