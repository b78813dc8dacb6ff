"""The pictures of a solved field: equipotentials, the potential along an axis, surface charge.

They are drawn from the boundary solution itself, also where no map reaches, with the voltages at
time zero.
"""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import numpy as np
from matplotlib.figure import Figure
from numpy.typing import NDArray

from driftwell.report.field_pictures.axis_potential import axis_potential
from driftwell.report.field_pictures.equipotentials import WIDEST, Drawn, equipotentials
from driftwell.report.field_pictures.surface_charge import charge_along_outlines, charge_in_space
from driftwell.report.paper.gallery import hang
from driftwell.report.paper.sheet import png, style
from driftwell.report.sections.outlines import outlines_of
from driftwell.solved.acting import ActingField
from driftwell.solved.edges import LETTERS

Floats = NDArray[np.float64]

_ACROSS, _LEAST = 360, 60
"""Points of the picture along its longer side, and along the shorter one at the least."""
_ALONG = 401
_MARGIN = 0.06
"""Room around what is shown, as part of its size."""
_PLANES = {"planar": (("x", "y"),), "spatial": (("z", "x"), ("x", "y"))}
NAMES = ("equipotentials", "equipotentials-across", "axis-potential", "surface-charge")


def draw_field(
    acting: ActingField, names: tuple[str, ...], title: str, provenance: str, folder: Path
) -> list[Path]:
    """Draw a solved field into ``pictures/`` of a folder that may be missing; returns the files.

    names : of the electrodes, in the order of their unit solutions

    Raises RecordError where the folder cannot be written.
    """
    with style():
        images = {
            f"{name}.png": png(figure, title)
            for name, figure in _figures(acting, names, title, provenance)
        }
    return hang(folder, images, [f"{name}.png" for name in NAMES], "the field itself is kept")


def _figures(
    acting: ActingField, names: tuple[str, ...], title: str, provenance: str
) -> Iterator[tuple[str, Figure]]:
    geometry = acting.solved.geometry
    for name, axes in zip(NAMES, _PLANES.get(geometry, (("z", "r"),)), strict=False):
        plane = _Plane(acting, axes)
        yield (
            name,
            equipotentials(
                f"{title}: potential at time 0",
                provenance,
                plane.across,
                plane.up,
                plane.potential,
                plane.electrodes(names),
                axes,
            ),
        )
    axis, along, units = _axis(acting)
    yield (
        "axis-potential",
        axis_potential(
            f"{title}: potential along {axis}",
            provenance,
            along,
            list(zip(names, units, strict=False)),
            acting.voltages(0.0) @ units,
            0.0,
            axis,
        ),
    )
    yield "surface-charge", _charge(acting, names, f"{title}: surface charge", provenance)


class _Plane:
    """A plane of the picture: its grid, the potential there, and where electrodes are.

    across, up : (nx,) and (ny,) float64, m; potential : (ny, nx), V, NaN inside electrodes
    """

    def __init__(self, acting: ActingField, axes: tuple[str, str]) -> None:
        self._acting = acting
        self._columns = _columns(acting.solved.geometry, axes)
        low, high = _extent(acting)
        self.across, self.up = _grid(low[list(self._columns)], high[list(self._columns)])
        points = np.zeros((self.up.size, self.across.size, len(low)))
        points[..., self._columns[0]] = self.across
        points[..., self._columns[1]] = self.up[:, None]
        flat = points.reshape(-1, len(low))
        shape = self.up.size, self.across.size
        distance, owner = acting.nearest(flat)
        self._distance, self._owner = distance.reshape(shape), owner.reshape(shape)
        outside = self._distance > 0.0
        self.potential = np.full(shape, np.nan)
        solution = acting.solved.solution
        self.potential[outside] = acting.voltages(0.0) @ solution.potential(flat[outside.ravel()])

    def electrodes(self, names: tuple[str, ...]) -> list[Drawn]:
        """The outlines of all electrodes in the plane, each named once."""
        return outlines_of(self.across, self.up, self._distance, self._owner, names)


def _columns(geometry: str, axes: tuple[str, str]) -> tuple[int, int]:
    """Which coordinates of a point stand for the axes of a picture."""
    letters = LETTERS[geometry]
    return letters.index(axes[0]), letters.index(axes[1])


def _extent(acting: ActingField) -> tuple[Floats, Floats]:
    """Least and largest coordinates of what is shown: the electrodes and the region."""
    region = np.array(acting.solved.map.region())
    panels = acting.solved.solution.panels.position
    low = np.minimum(region[:, 0], panels.min(axis=0))
    high = np.maximum(region[:, 1], panels.max(axis=0))
    room = _MARGIN * (high - low)
    low, high = low - room, high + room
    if acting.solved.geometry == "axisymmetric":
        low[0] = 0.0
        high[0] = max(high[0], (high[1] - low[1]) / WIDEST)
    return low, high


def _grid(low: Floats, high: Floats) -> tuple[Floats, Floats]:
    """Points along both axes, as far apart as each other where neither side is very short."""
    size = high - low
    counts = np.maximum(_LEAST, np.ceil(_ACROSS * size / size.max())).astype(int)
    return (
        np.linspace(low[0], high[0], counts[0]),
        np.linspace(low[1], high[1], counts[1]),
    )


def _axis(acting: ActingField) -> tuple[str, Floats, Floats]:
    """An axis through the centre: its name, points, and unit potentials (e, n) outside of metal."""
    column = {"axisymmetric": 1, "planar": 0, "spatial": 2}[acting.solved.geometry]
    low, high = acting.solved.map.region()[column]
    along = np.linspace(low, high, _ALONG)
    points = np.zeros((_ALONG, acting.solved.map.grid.axes))
    points[:, column] = along
    units = acting.solved.solution.potential(points)
    return ("x" if acting.solved.geometry == "planar" else "z"), along, units


def _charge(acting: ActingField, names: tuple[str, ...], title: str, provenance: str) -> Figure:
    panels = acting.solved.solution.panels
    density = acting.voltages(0.0)[: len(panels.density)] @ panels.density
    if acting.solved.geometry == "spatial":
        return charge_in_space(title, provenance, panels.position, density)
    found = []
    for number, name in enumerate(names):
        own = panels.electrode == number
        steps = np.linalg.norm(np.diff(panels.position[own], axis=0), axis=1)
        found.append((name, np.concatenate([[0.0], np.cumsum(steps)]), density[own]))
    return charge_along_outlines(title, provenance, found)
