"""The scenario's own electrodes, as panels that answer to the charges."""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import replace
from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.boundary.triangle import COLUMNS
from driftwell.errors import ScenarioError
from driftwell.forms import Bound, Count, Length, Positive, key
from driftwell.geometry.meshing import mesh_of
from driftwell.geometry.solid import Extruded, Mesh, Solid
from driftwell.images.form import ImagesForm
from driftwell.images.panel_sum import PanelImages

Floats = NDArray[np.float64]

DEFAULT_PANELS, MOST_PANELS = 2000, 20_000
Panels = Annotated[Count, Bound(least=50, most=MOST_PANELS)]
_GRADE = 1.5
"""Power by which panels are smaller towards sharp edges."""
_TURNS = (math.pi / 8.0, math.pi / 5.0, math.pi / 3.0)
"""rad between facets of curved surfaces, the finest that gives few enough triangles."""
_ATTEMPTS, _NEAR_ENOUGH, _TOO_MANY = 8, 0.15, 1.4


class ElectrodeImages(ImagesForm):
    """The electrodes of the scenario, cut into triangles that carry what the charges induce.

    Forces are right to 1 % where triangles are smaller than a third of the distance to them. The
    cost of a step grows with charges times triangles, and with the square of the triangles.
    """

    kind: Literal["electrodes"]
    panels: Panels = key("about how many triangles, of all electrodes", default=DEFAULT_PANELS)
    length: Positive[Length] | None = key(
        "length that endless electrodes are cut to, half of it on either side of their centre; "
        "needed where they are planar",
        default=None,
        example="40 mm",
    )

    def words(self) -> str:
        cut = "" if self.length is None else f", {self.length * 1e3:.6g} mm long"
        return f"of the electrodes, as about {self.panels} triangles{cut}"

    def room_in_bytes(self, n: int) -> int:
        return 3 * 8 * self.panels * (self.panels + COLUMNS)


def electrode_images(
    solids: Sequence[Solid],
    panels: int = DEFAULT_PANELS,
    length: float | None = None,
    centre: Sequence[float] = (0.0, 0.0, 0.0),
) -> PanelImages:
    """Images of electrodes at fixed voltages; which of them a body belongs to does not matter.

    Parameters
    ----------
    solids : all bodies, and what encloses them, in the electrodes' own coordinates
    panels : about how many triangles they are cut into, all together
    length : m, what endless ones are cut to
    centre : m, place the own coordinates count from

    Raises ScenarioError where endless bodies have no length, or bodies cannot be cut.
    """
    corners = triangles_of(solids, panels, length)
    return PanelImages(np.ascontiguousarray(corners + np.asarray(centre, dtype=np.float64)))


def triangles_of(solids: Sequence[Solid], panels: int, length: float | None) -> Floats:
    """About `panels` triangles (k, 3 corners, 3 axes), m, of all bodies, alike in size."""
    ended = [_ended(solid, length) for solid in solids]
    for turn in _TURNS:
        best = _cut(ended, panels, turn)
        if len(best) <= _TOO_MANY * panels:
            return best
    raise ScenarioError(
        f"[images]: the electrodes cannot be cut into about {panels} triangles (the least found: "
        f"{len(best)}): their shapes have more parts than that. Raise `panels`, up to "
        f"{MOST_PANELS}."
    )


def _cut(solids: Sequence[Solid], panels: int, turn: float) -> Floats:
    """The number of triangles nearest to `panels` that some sizes of them give.

    turn : rad, largest angle between neighbouring normals of a curved surface
    """
    low, high = 0.0, math.inf
    extent = size = _extent(solids)
    best: Floats | None = None
    for _ in range(_ATTEMPTS):
        found = _corners(solids, size, turn)
        if best is None or abs(len(found) - panels) < abs(len(best) - panels):
            best = found
        if abs(len(found) - panels) <= _NEAR_ENOUGH * panels:
            break
        if len(found) > panels:
            if size >= extent:  # no larger ones fit
                break
            low = max(low, size)
        else:
            high = min(high, size)
        guess = size * math.sqrt(len(found) / panels)
        size = guess if low < guess < high else math.sqrt(max(low, 0.1 * high) * high)
    if best is None:
        raise ScenarioError("[images]: there is no electrode to cut into triangles.")
    return best


def _ended(solid: Solid, length: float | None) -> Solid:
    if not isinstance(solid, Extruded) or math.isfinite(solid.half_length):
        return solid
    if length is None:
        raise ScenarioError(
            "[images]: the electrodes are the same at every z and have no end; needs a `length` "
            "that they are cut to, several times their distance from the charges."
        )
    return replace(solid, half_length=0.5 * length)


def _corners(solids: Sequence[Solid], size: float, turn: float) -> Floats:
    try:
        meshes = [mesh_of(solid, size, turn, grade=_GRADE, fair=True) for solid in solids]
    except ValueError as fault:
        raise ScenarioError(
            f"[images]: an electrode cannot be cut into triangles ({fault})."
        ) from fault
    found = np.concatenate([mesh.vertices[mesh.triangles] for mesh in meshes])
    area2 = np.linalg.norm(np.cross(found[:, 1] - found[:, 0], found[:, 2] - found[:, 0]), axis=1)
    longest = np.linalg.norm(found - np.roll(found, 1, axis=1), axis=2).max(axis=1)
    return np.asarray(found[area2 > 1e-9 * longest**2])


def _extent(solids: Sequence[Solid]) -> float:
    """A length, m, of the order of the largest body: the first guess of the panels' size."""
    sizes = []
    for solid in solids:
        if isinstance(solid, Mesh):
            sizes.append(float(np.ptp(solid.vertices, axis=0).max()))
        else:
            sizes.append(float(np.ptp(solid.outline.pieces[:, :4])))
    return max(sizes, default=1.0)
