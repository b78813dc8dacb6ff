"""Two grounded planes with the charges between them."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import Direction, Length, Point, Positive, key
from driftwell.images.form import MirrorForm
from driftwell.images.gap_sum import FAR_BYTES, GapImages
from driftwell.images.image_sum import Asked, Images


class PlatesImages(MirrorForm):
    """Two endless parallel conducting planes at fixed voltages; the charges are between them."""

    mirrors = 2

    kind: Literal["gap"]
    at: Point = key("a point of the first plane", example=["0 mm", "0 mm", "-2 mm"])
    normal: Direction = key(
        "direction from the first plane to the other; any length but zero",
        default=(0.0, 0.0, 1.0),
    )
    distance: Positive[Length] = key("distance between the planes", example="5 mm")

    def depth(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        height = (position.T - self.at) @ np.array(self.normal)
        return np.asarray(np.minimum(height, self.distance - height))

    def images(self, asked: Asked) -> Images:
        return GapImages(
            np.array(self.at),
            np.array(self.normal),
            self.distance,
            self.blur(asked),
            asked.softening,
            asked.fineness,
        )

    def room_in_bytes(self, n: int) -> int:
        return FAR_BYTES + super().room_in_bytes(n)

    def words(self) -> str:
        place = ", ".join(f"{each * 1e3:.6g}" for each in self.at)
        towards = ", ".join(f"{each:.6g}" for each in self.normal)
        return (
            f"of the gap from a plane at ({place}) mm to another {self.distance * 1e3:.6g} mm away "
            f"towards ({towards})"
        )
