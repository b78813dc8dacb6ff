"""An endless grounded tube with the charges inside."""

from __future__ import annotations

from typing import Annotated, Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import Bound, Length, Point, Positive, Real, key
from driftwell.images.form import ClosedForm
from driftwell.images.image_sum import Asked, Images
from driftwell.images.tube_sum import GROUPS, TubeImages, work_size
from driftwell.images.tube_table import orders_for

_AXES = {"x": 0, "y": 1, "z": 2}
Reach = Annotated[Real, Bound(least=0.3, most=0.95)]


class CylinderImages(ClosedForm):
    """An endless round conducting tube at a fixed voltage, around the charges."""

    kind: Literal["cylinder"]
    radius: Positive[Length] = key("inner radius of the tube", example="3.5 mm")
    axis: Literal["x", "y", "z"] = key("direction of the tube's axis", default="z")
    centre: Point = key("a point of the axis", default=(0.0, 0.0, 0.0))
    reach: Reach = key(
        "distance from the axis, in radii, beyond which the force does not grow; it is right to "
        "1e-4 within 0.75 of it, to 1 % within 0.85; the nearer to 1, the more a charge out there "
        "costs",
        default=0.9,
    )

    def depth(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        along = _AXES[self.axis]
        away = position.T - self.centre
        one, two = away[:, (along + 1) % 3], away[:, (along + 2) % 3]
        return np.asarray(self.radius - np.hypot(one, two))

    def images(self, asked: Asked) -> Images:
        return TubeImages(_AXES[self.axis], np.array(self.centre), self.radius, self.reach)

    def words(self) -> str:
        return (
            f"of an endless tube along {self.axis}, radius {self.radius * 1e3:.6g} mm, whose force "
            f"does not grow beyond {self.reach:g} of it"
        )

    def room_in_bytes(self, n: int) -> int:
        return 20_000_000 + 8 * GROUPS * work_size(n, orders_for(self.reach))
