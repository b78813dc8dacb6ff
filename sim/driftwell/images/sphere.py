"""A grounded hollow sphere with the charges inside."""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import NDArray

from driftwell.forms import Length, Point, Positive, key
from driftwell.images.form import MirrorForm
from driftwell.images.image_sum import Asked, Images
from driftwell.images.mirror_sum import sphere_images


class SphereImages(MirrorForm):
    """A hollow conducting sphere at a fixed voltage, around the charges."""

    kind: Literal["sphere"]
    radius: Positive[Length] = key("inner radius", example="5 mm")
    centre: Point = key("the sphere's centre", default=(0.0, 0.0, 0.0))

    def depth(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        return np.asarray(self.radius - np.linalg.norm(position.T - self.centre, axis=1))

    def mirrored(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        square = np.sum((position.T - self.centre) ** 2, axis=1)
        return np.asarray(self.radius - square / self.radius)

    def images(self, asked: Asked) -> Images:
        return sphere_images(np.array(self.centre), self.radius, self.blur(asked), asked.softening)

    def words(self) -> str:
        return f"of a sphere of radius {self.radius * 1e3:.6g} mm around the charges"
