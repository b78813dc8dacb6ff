"""Vectors of eight charges and their moments, in lanes: what a Six of accounts.py is the sum of."""

from __future__ import annotations

from driftwell.kernels import inner_kernel
from driftwell.kernels.lanes import LanesType, fused, lanes, total
from driftwell.stepping.accounts import Six

SixLanes = tuple[LanesType, LanesType, LanesType, LanesType, LanesType, LanesType]
"""The three components of a vector of each of eight charges, then those of its moment."""


@inner_kernel
def no_six() -> SixLanes:
    """Nothing, to add to."""
    none = lanes(0.0)
    return none, none, none, none, none, none


@inner_kernel
def with_moment(
    x: LanesType, y: LanesType, z: LanesType, fx: LanesType, fy: LanesType, fz: LanesType
) -> SixLanes:
    """A vector at a place, with its moment about the origin."""
    minus = lanes(-0.0)
    return (
        fx,
        fy,
        fz,
        fused(y, fz, minus - z * fy),
        fused(z, fx, minus - x * fz),
        fused(x, fy, minus - y * fx),
    )


@inner_kernel
def six_and(a: SixLanes, b: SixLanes) -> SixLanes:
    """The sum of two, lane by lane."""
    return a[0] + b[0], a[1] + b[1], a[2] + b[2], a[3] + b[3], a[4] + b[4], a[5] + b[5]


@inner_kernel
def six_totals(a: SixLanes) -> Six:
    """The sums over the lanes."""
    return total(a[0]), total(a[1]), total(a[2]), total(a[3]), total(a[4]), total(a[5])
