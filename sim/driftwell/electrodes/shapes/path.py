"""An outline drawn point by point: straight lines and circular arcs."""

from __future__ import annotations

from typing import TYPE_CHECKING, Literal

import numpy as np

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms import Form, Length, TrueOrFalse, checked, key, refuse, row_or_table, spelled
from driftwell.forms.faults import Fault
from driftwell.geometry.crossings import meetings, neighbours
from driftwell.geometry.outline import Outline, arc_through, line, outline
from driftwell.geometry.revolution import least_r, without_axis
from driftwell.geometry.strokes import strokes

Point2 = tuple[float, float]
_SAME = 1e-9
"""Distance, of the outline's size, below which two places are one."""


class ArcTo(Form):
    """A circular arc from the point before."""

    through: tuple[Length, Length] = key("a point on the arc", example=["7 mm", "3 mm"])
    to: tuple[Length, Length] = key("its end", example=["10 mm", "4 mm"])


if TYPE_CHECKING:
    Station = Point2 | ArcTo
else:
    Station = row_or_table(tuple[Length, Length], ArcTo)


def _end(station: Point2 | ArcTo) -> Point2:
    return station.to if isinstance(station, ArcTo) else station


class Path(ShapeForm):
    """Lines and arcs from point to point, in (r, z) or (x, y)."""

    kind: Literal["outline"]
    path: tuple[Station, ...] = key(
        "its points; a table with `through` and `to` in a point's place is a circular arc",
        example=[["2 mm", "0 mm"], ["9 mm", "-4 mm"], ["9 mm", "4 mm"]],
    )
    closed: TrueOrFalse = key(
        "true: the body that the outline goes around, its last point joined to its first; false: a "
        "thin sheet",
        default=True,
    )

    @checked
    def _drawable(self) -> Path:
        if len(self.path) < 2:
            raise refuse(f"`path` needs at least 2 points; there are {len(self.path)} here")
        if isinstance(self.path[0], ArcTo):
            raise refuse("`path` must begin with a point: an arc goes on from the point before it")
        return self

    def drawn(self) -> bool:
        return True

    def _pieces(self) -> list[np.ndarray]:
        """All pieces; where the outline is closed and its ends are apart, a line joins them."""
        at = _end(self.path[0])
        pieces = []
        for station in self.path[1:]:
            end = _end(station)
            if isinstance(station, ArcTo):
                pieces.append(arc_through(at, station.through, end))
            else:
                pieces.append(line(at, end))
            at = end
        if self.closed and at != _end(self.path[0]):
            pieces.append(line(at, _end(self.path[0])))
        return pieces

    def faults(self, geometry: Geometry) -> list[Fault]:
        found = self._repeated()
        if found:
            return found
        whole = outline([self._pieces()], self.closed)
        if self.closed and len(whole.pieces) == 2 and not whole.pieces[:, 6].any():
            text = "bounds no area: needs a third point, or `closed = false` for a thin sheet"
            return [Fault(("path",), "", text)]
        if geometry == "axisymmetric":
            size = float(np.abs(whole.pieces[:, :4]).max())
            least = least_r(whole)
            if least < -1e-12 * size:
                text = f"r must not be negative; it comes down to {spelled(least, 'm')} here"
                return [Fault(("path",), "", text)]
            if len(self.outline(geometry).pieces) == 0:
                return [Fault(("path",), "", "must not lie on the axis: it has no surface there")]
        return self._crossed(whole)

    def _repeated(self) -> list[Fault]:
        ends = np.array([_end(station) for station in self.path])
        size = float(np.abs(ends).max())
        found = []
        for k in range(1, len(ends)):
            station = self.path[k]
            first, last = ends[k - 1], ends[k]
            if np.hypot(*(last - first)) <= _SAME * size:
                text = "must not be the point before once more"
                if isinstance(station, ArcTo):
                    text = "an arc must not end where it begins; draw a full circle as two arcs"
                found.append(Fault(("path", k), "", text))
            elif isinstance(station, ArcTo):
                middle = np.array(station.through)
                if min(np.hypot(*(middle - first)), np.hypot(*(middle - last))) <= _SAME * size:
                    text = "must lie between the ends of the arc, not on one of them"
                    found.append(Fault(("path", k, "through"), "", text))
        return found

    def _crossed(self, whole: Outline) -> list[Fault]:
        """Whether the outline meets itself anywhere but at its joints."""
        walked = strokes(whole)
        near = _SAME * float(np.abs(whole.pieces[:, :4]).max())
        count = len(walked)
        around = abs(walked.end[-1] - walked.start[0]) <= near
        for i, j in neighbours(walked, near):
            for s, t in meetings(walked, i, j, near):
                follows = j == i + 1 and walked.length[i] - s <= 8.0 * near and t <= 8.0 * near
                closes = (
                    around
                    and (i, j) == (0, count - 1)
                    and s <= 8.0 * near
                    and walked.length[j] - t <= 8.0 * near
                )
                if not (follows or closes):
                    place = walked.at(np.array([s]), np.array([i]))[0]
                    at = f"({spelled(float(place.real), 'm')}, {spelled(float(place.imag), 'm')})"
                    return [Fault(("path",), "", f"must not cross or touch itself, as at {at}")]
        return []

    def outline(self, geometry: Geometry) -> Outline:
        pieces = self._pieces()
        if geometry == "axisymmetric":
            return without_axis([pieces], self.closed)
        return outline([pieces], self.closed)

    def words(self) -> str:
        what = "closed outline" if self.closed else "thin outline"
        start = ", ".join(spelled(x, "m") for x in _end(self.path[0]))
        return f"{what} of {len(self.path)} points from ({start})"
