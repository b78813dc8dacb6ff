"""What every kind of images looks like to the time loop.

Charges q_i between conductors at fixed voltages hold the energy

    U = 1/2 sum_ij q_i q_j G(x_i, x_j),    F_i = -dU/dx_i                                  (1)

of what they induce, with G symmetric: 1/2, because the induced charge is made while they come.
A sum fills, for each charge, the field F_i / q_i and the potential sum_j q_j G(x_i, x_j), so that
U is half the sum of q times that. The field is the exact gradient of the energy the sum has.

References
----------
J. D. Jackson, Classical Electrodynamics, 3rd ed. (1999), sections 1.10, 2.1 and 2.2.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from driftwell.kernels import kernel
from driftwell.kernels.pointers import CompiledFunction

Floats = NDArray[np.float64]

SIGNATURE = (
    "void(float64[:,::1], float64[::1], float64, float64[::1], float64[:,::1], float64[:,::1])"
)
"""(position (3, n), charge (n,), 1/(4 pi eps0), table, work, out_image (4, n))."""
THREADED = 512
"""From this many charges on threads pay for their start."""
BY_TREE = 4_000
"""From this many charges on the tree sums images in planes faster than each by itself."""


@dataclass(frozen=True, slots=True)
class Fineness:
    """How the tree sums over the images of many charges: as over their pairs (coulomb/tree.py).

    order : of the expansions; leaf : most charges in a leaf
    tolerance : error allowed to the force between two cells, relative to the field that is there
    mixed : whether near pairs are taken in mixed precision
    """

    order: int
    leaf: int
    tolerance: float
    mixed: bool


@dataclass(frozen=True, slots=True)
class Asked:
    """What a run asks of the sum over its images.

    followed : m, how near to a conductor steps can follow a charge's own image
        (:func:`driftwell.images.form.followed`)
    softening : m, e of the pairs' law; images of blurred charges are blurred alike
    fineness : of the tree; None where every image is to be summed by itself
    """

    followed: float = 0.0
    softening: float = 0.0
    fineness: Fineness | None = None


@dataclass(frozen=True, slots=True)
class ImageSum:
    """A sum over the images as the time loop takes it, for one number of charges.

    function : of :data:`SIGNATURE`; fills field, V/m, and potential, V, of the images
    table : numbers it reads
    work : room it works in, overwritten
    keeps : whether the room holds addresses, so that nobody else may write there
    """

    function: CompiledFunction
    table: Floats
    work: Floats
    keeps: bool = False


class Images(Protocol):
    """The conductors of a run, and how what they answer is summed."""

    def laid_out(self, n: int, threads: int) -> ImageSum:
        """The sum for `n` charges on so many threads; the bits do not depend on these."""

    def doubt(self, position: Floats, charge: Floats) -> str | None:
        """What should be said of the accuracy where the charges are now, (3, n) and (n,)."""


@kernel
def no_image(
    position: np.ndarray,
    charge: np.ndarray,
    constant: float,
    table: np.ndarray,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """No conductor: nothing is written."""


def no_images() -> ImageSum:
    """The sum of a run without images, which nobody calls."""
    return ImageSum(CompiledFunction(no_image, SIGNATURE), np.zeros(0), np.zeros((0, 0)))
