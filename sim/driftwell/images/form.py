"""What every kind of images declares."""

from __future__ import annotations

from typing import TYPE_CHECKING, ClassVar

import numpy as np
from numpy.typing import NDArray

from driftwell.constants import COULOMB_CONSTANT
from driftwell.forms import Form, Length, NonNegative, key, or_word, spelled
from driftwell.images.image_sum import BY_TREE, Asked, Images

if TYPE_CHECKING:
    Closest = float | str
else:
    Closest = or_word("auto", NonNegative[Length])


_RESOLVED = 0.3
"""rad, the most that steps turn an oscillation by and still follow it well."""
_STEPS, _SHARE = 2.0, 0.02
TREE_BYTES = 600
"""A charge, or a mirrored one, takes in the tree's work space, at the most."""


class ImagesForm(Form):
    """Base of all kinds of images."""

    def words(self) -> str:
        """What the charges feel, for `driftwell check`."""
        raise TypeError(f"{type(self).__name__} must describe itself")

    def room_in_bytes(self, n: int) -> int:
        """Bytes of tables and work space for `n` charges."""
        return 64 * n


class ClosedForm(ImagesForm):
    """Base of the kinds that are a conductor by themselves, with its images in closed form."""

    def depth(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        """Distance (n,), m, of places (3, n) from the conductor, positive where charges may be."""
        raise TypeError(f"{type(self).__name__} must know its own side")

    def images(self, asked: Asked) -> Images:
        """The conductor, for what the run asks of its sum."""
        raise TypeError(f"{type(self).__name__} must make its images")


class MirrorForm(ClosedForm):
    """Base of the kinds whose force grows without bound towards the conductor."""

    mirrors: ClassVar[int] = 0
    """Planes whose images the tree sums where charges are many."""

    closest: Closest = key(
        "distance c from the conductor within which the force stops growing; it errs by "
        "1.5 (c/d)^2 at the distance d from a plane, by 6 (c/a)^2 in the middle of a sphere of "
        'radius a; "auto": what the step can follow, which the run says. It is never taken less '
        "than half of coulomb.softening, with which images are as blurred as their charges",
        default="auto",
        example="10 nm",
    )

    def room_in_bytes(self, n: int) -> int:
        many = n >= BY_TREE and self.mirrors > 0
        return 64 * n + many * (self.mirrors + 1) * TREE_BYTES * n

    def blur(self, asked: Asked) -> float:
        """The length s, m, that the images' law is softened with: 2 c, and no less than e."""
        closest = asked.followed if isinstance(self.closest, str) else self.closest
        return max(2.0 * closest, asked.softening)

    def mirrored(self, position: NDArray[np.float64]) -> NDArray[np.float64]:
        """D (n,), m, of the images' law at places (3, n): before a plane twice the distance."""
        return 2.0 * self.depth(position)

    def closest_words(self) -> str:
        """How near the conductor the force grows, for `driftwell check`."""
        if isinstance(self.closest, str):
            return "the force stops growing at the distance that steps can follow"
        if self.closest == 0.0:
            return "the force grows without bound towards the conductor"
        return f"the force stops growing within {spelled(self.closest, 'm')} of the conductor"


def lost_part(mirrored: NDArray[np.float64], blur: float, softening: float) -> NDArray[np.float64]:
    """Part of a charge's own image force that the length `blur` takes, of 1.

    The force goes with D/(D^2 + s^2)^(3/2); it is compared with the one that is softened as the
    pairs are, s = e, which is the law that was asked for.

    mirrored : (n,) D, m, not negative; blur, softening : s and e, m
    """
    square = mirrored**2
    asked, taken = square + softening**2, square + blur**2
    part = np.divide(asked, taken, out=np.ones_like(square), where=taken > 0.0)
    return np.asarray(1.0 - part**1.5)


def followed(
    step: float,
    charge: NDArray[np.float64],
    mass: NDArray[np.float64],
    velocity: NDArray[np.float64],
    distance: NDArray[np.float64],
) -> float:
    """The distance c, m, from the conductor that steps can follow every charge's own image to.

    With it the well in front of the conductor, K Q^2 / (4 (d^2 + c^2)^(1/2)), is nowhere steeper
    than an oscillation of 0.3 rad in a step: c^3 = K Q^2 h^2 / (4 m 0.3^2). Two steps of the
    fastest charge are taken where that is more, but no more than a fiftieth of the distance of the
    nearest, whose force then errs by 6e-4.

    step : s between two kicks; charge : (n,) C and mass : (n,) kg, of the macro-charges
    velocity : (3, n) m/s; distance : (n,) m from the conductor, where they begin
    """
    if charge.size == 0:
        return 0.0
    fastest = float(np.max(charge**2 / mass))
    alone = float(np.cbrt(COULOMB_CONSTANT * fastest * step**2 / (4.0 * _RESOLVED**2)))
    passed = _STEPS * step * float(np.linalg.norm(velocity, axis=0).max())
    return max(alone, min(passed, _SHARE * float(distance.min())))
