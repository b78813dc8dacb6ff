"""Spindle and barrel of the quadro-logarithmic field.

    phi = (k/2) (z^2 - r^2/2) + (k/2) Rm^2 ln(r/Rm)                                         (1)

The equipotential that has the radius R at z = 0 is

    z^2 = (r^2 - R^2)/2 - Rm^2 ln(r/R)                                                      (2)

which narrows from R < Rm towards both ends. Between the spindle of radius R1 and the barrel of
radius R2 the voltage is phi(R2, 0) - phi(R1, 0).

References
----------
R. D. Knight, Appl. Phys. Lett. 38 (1981) 221.
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


class QuadroLogarithmic(ShapeForm):
    """A spindle about the axis, or a barrel around it, along an equipotential of the field."""

    kind: Literal["quadro-logarithmic"]
    part: Literal["spindle", "barrel"] = key("which electrode", example="spindle")
    radius: Positive[Length] = key("its radius in the middle plane, z = 0", example="6 mm")
    characteristic_radius: Positive[Length] = key(
        "radius Rm at which the field's pull towards the axis ends", example="22 mm"
    )
    along: tuple[Length, Length] = key(
        "from and to along z, from the middle plane", example=["-20 mm", "20 mm"]
    )
    outer: Positive[Length] | None = key("outer radius of a barrel", default=None)
    centre: Length = key("z of the middle plane", default=0.0)

    @checked
    def _possible(self) -> Self:
        if self.radius >= self.characteristic_radius:
            raise refuse("`radius` must be less than `characteristic_radius`")
        if not self.along[0] < self.along[1]:
            raise refuse("the first number of `along` must be less than the second")
        if self.part == "spindle" and self.outer is not None:
            raise refuse("a spindle has no `outer`: leave it out")
        if self.part == "barrel" and (self.outer is None or self.outer <= self.radius):
            raise refuse(f"a barrel needs `outer`, greater than {spelled(self.radius, 'm')}")
        return self

    def drawn(self) -> bool:
        return True

    def faults(self, geometry: Geometry) -> list[Fault]:
        found = []
        if geometry != "axisymmetric":
            text = 'is turned about z: needs [electrodes] geometry = "axisymmetric"'
            found.append(Fault(("kind",), '"quadro-logarithmic"', text))
        end = max(abs(z) for z in self.along)
        # near the axis the radius falls like exp(-z^2/Rm^2)
        if self.surface(end) < 1e-3 * self.radius:
            text = (
                f"the electrode thins to {spelled(self.surface(end), 'm')} there: make it shorter"
            )
            found.append(Fault(("along",), "", text))
        return found

    def surface(self, z: float) -> float:
        """The radius at a height z above the middle plane, m: equation (2)."""
        from scipy.optimize import brentq

        ratio = (self.characteristic_radius / self.radius) ** 2
        height = (z / self.radius) ** 2

        def gap(log: float) -> float:
            return 0.5 * math.expm1(2.0 * log) - ratio * log - height

        # with r = R exp(log): the first term lies between -1/2 and 0
        return self.radius * math.exp(brentq(gap, -(height + 0.6) / ratio, 0.0, xtol=1e-15))

    def outline(self, geometry: Geometry) -> Outline:
        squared = self.characteristic_radius**2

        def profile(z: float) -> tuple[complex, complex]:
            r = self.surface(z)
            return complex(r, z + self.centre), complex(2.0 * z / (r - squared / r), 1.0)

        first, last = self.along
        pieces = biarc_chain(profile, first, last)
        bottom, top = profile(first)[0], profile(last)[0]
        side = 0.0 if self.outer is None else self.outer
        below, above = (side, bottom.imag), (side, top.imag)
        pieces += [
            line((top.real, top.imag), above),
            line(above, below),
            line(below, (bottom.real, bottom.imag)),
        ]
        if side == 0.0:
            return without_axis([pieces], solid=True)
        return outline([pieces], solid=True)

    def words(self) -> str:
        length = spelled(self.along[1] - self.along[0], "m")
        return (
            f"quadro-logarithmic {self.part}, radius {spelled(self.radius, 'm')}, length {length}"
        )
