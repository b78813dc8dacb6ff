"""The ground floor of compiled code: decorators, status codes, fixed-order sums, waveforms.

Nothing here knows physics beyond numbers; nothing here imports more than numpy, numba and math.
"""

from driftwell.kernels.compiled import (
    given_kernel,
    inlined_kernel,
    inner_kernel,
    inner_pair_kernel,
    inner_sum_kernel,
    kernel,
    outer_kernel,
    pair_kernel,
    pointed_kernel,
    threaded_kernel,
    threaded_pair_kernel,
    view_kernel,
)

__all__ = [
    "given_kernel",
    "inlined_kernel",
    "inner_kernel",
    "inner_pair_kernel",
    "inner_sum_kernel",
    "kernel",
    "outer_kernel",
    "pair_kernel",
    "pointed_kernel",
    "threaded_kernel",
    "threaded_pair_kernel",
    "view_kernel",
]
