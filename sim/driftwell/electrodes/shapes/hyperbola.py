"""Electrodes of quadrupole fields: hyperbolas with a straight back.

About z, ring and end caps:

    r^2/r0^2 - z^2/z0^2 = 1 (ring), -1 (caps)                                               (1)

In a plane, four rods:

    x^2 - y^2 = r0^2 (left and right), -r0^2 (upper and lower)                              (2)

References
----------
W. Paul, Rev. Mod. Phys. 62 (1990) 531, secs. 2 and 3.
"""

from __future__ import annotations

import math
from typing import Literal, Self

from driftwell.electrodes.shapes.form import Geometry, ShapeForm
from driftwell.forms import Length, Positive, checked, key, refuse, spelled
from driftwell.forms.faults import Fault
from driftwell.geometry.biarcs import biarc_chain
from driftwell.geometry.outline import Outline, line, outline
from driftwell.geometry.revolution import without_axis

_ROUND = ("ring", "upper-cap", "lower-cap")
_FLAT = ("right", "left", "upper", "lower")
_DIRECTION = {
    "ring": 1.0,
    "right": 1.0,
    "left": -1.0,
    "upper": 1j,
    "lower": -1j,
    "upper-cap": 1j,
    "lower-cap": -1j,
}


class Hyperbola(ShapeForm):
    """The body between a branch of a hyperbola and the straight line through its two ends."""

    kind: Literal["hyperbola"]
    part: Literal["ring", "upper-cap", "lower-cap", "right", "left", "upper", "lower"] = key(
        "which electrode; ring and caps are turned about z, the others are rods along z",
        example="ring",
    )
    radius: Positive[Length] = key(
        "least distance of the ring, or of a rod, from the centre", example="10 mm"
    )
    height: Positive[Length] | None = key(
        "least distance of the caps from the centre; left out: the radius over the root of 2, of a "
        "rod the radius",
        default=None,
    )
    outer: Positive[Length] = key(
        "distance from the centre, of ring and caps from z, at which the hyperbola ends",
        example="25 mm",
    )
    centre: tuple[Length, Length] = key("centre of the field", default=(0.0, 0.0))

    @checked
    def _reaches(self) -> Self:
        nearest = 0.0 if self.part.endswith("cap") else self.radius
        if self.outer <= nearest * (1.0 + 1e-6):
            raise refuse(f"`outer` must be greater than `radius`, {spelled(self.radius, 'm')}")
        if self.part in _FLAT and self.height not in (None, self.radius):
            raise refuse("of rods, `height` is the radius: leave it out")
        return self

    def drawn(self) -> bool:
        return True

    def faults(self, geometry: Geometry) -> list[Fault]:
        parts = _ROUND if geometry == "axisymmetric" else _FLAT
        found = []
        if self.part not in parts:
            words = ", ".join(f'"{part}"' for part in parts)
            text = f"must be one of {words} where the geometry is {geometry}"
            found.append(Fault(("part",), f'"{self.part}"', text))
        if geometry == "axisymmetric" and self.centre[0] != 0.0:
            text = "must be 0: the centre of an axisymmetric field is on the axis"
            found.append(Fault(("centre", 0), spelled(self.centre[0], "m"), text))
        return found

    def _lengths(self) -> tuple[float, float, float]:
        """Distance of the vertex from the centre, the other half axis, and how far along it."""
        height = self.height
        if height is None:
            height = self.radius if self.part in _FLAT else self.radius / math.sqrt(2.0)
        if self.part.endswith("cap"):
            return height, self.radius, self.outer
        nearest = self.radius
        return nearest, height, height * math.sqrt((self.outer / nearest) ** 2 - 1.0)

    def outline(self, geometry: Geometry) -> Outline:
        nearest, across, reach = self._lengths()
        middle = complex(*self.centre)
        towards = _DIRECTION[self.part]
        # along i times `towards`: to the left as seen from the centre
        last = math.asinh(reach / across)
        first = -last
        if geometry == "axisymmetric" and self.part == "upper-cap":
            last = 0.0
        if geometry == "axisymmetric" and self.part == "lower-cap":
            first = 0.0

        def branch(u: float) -> tuple[complex, complex]:
            point = complex(nearest * math.cosh(u), across * math.sinh(u))
            slope = complex(nearest * math.sinh(u), across * math.cosh(u))
            return middle + towards * point, towards * slope

        pieces = biarc_chain(branch, first, last)
        begin, end = branch(first)[0], branch(last)[0]
        if geometry == "axisymmetric" and self.part.endswith("cap"):
            # snapped to the axis, then straight out to where the hyperbola ends
            on_axis = complex(0.0, (middle + towards * nearest).imag)
            back = complex(0.0, (begin if self.part == "upper-cap" else end).imag)
            if self.part == "upper-cap":
                pieces[-1][2:4] = (on_axis.real, on_axis.imag)
                pieces += [line(_pair(on_axis), _pair(back)), line(_pair(back), _pair(begin))]
            else:
                pieces[0][0:2] = (on_axis.real, on_axis.imag)
                pieces += [line(_pair(end), _pair(back)), line(_pair(back), _pair(on_axis))]
            return without_axis([pieces], solid=True)
        return outline([[*pieces, line(_pair(end), _pair(begin))]], solid=True)

    def words(self) -> str:
        what = f"hyperbolic {self.part.replace('-', ' ')}"
        return f"{what}, {spelled(self._lengths()[0], 'm')} from the centre"


def _pair(z: complex) -> tuple[float, float]:
    return z.real, z.imag
