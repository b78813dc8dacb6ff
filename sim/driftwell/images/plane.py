"""A grounded plane with the charges on one side of it."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import Direction, Point, key
from driftwell.images.form import MirrorForm
from driftwell.images.image_sum import Asked, Images
from driftwell.images.mirror_sum import plane_images


class PlaneImages(MirrorForm):
    """An endless conducting plane at a fixed voltage; the charges are where its normal points."""

    mirrors = 1

    kind: Literal["plane"]
    at: Point = key("a point of the plane", example=["0 mm", "0 mm", "-2 mm"])
    normal: Direction = key(
        "direction from the plane to the side of the charges; any length but zero",
        default=(0.0, 0.0, 1.0),
    )

    def depth(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.asarray((position.T - self.at) @ np.array(self.normal))

    def images(self, asked: Asked) -> Images:
        return plane_images(
            np.array(self.at),
            np.array(self.normal),
            self.blur(asked),
            asked.softening,
            asked.fineness,
        )

    def words(self) -> str:
        place = ", ".join(f"{each * 1e3:.6g}" for each in self.at)
        towards = ", ".join(f"{each:.6g}" for each in self.normal)
        return f"of a plane at ({place}) mm, charges towards ({towards})"
