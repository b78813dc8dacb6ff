"""Charges between plates spread over a grid, summed there, and handed out: gap_far.py, eq. (2).

The grid lies still; of it only the nodes are used that the charges reach now. Charges are spread by
groups of a number that does not depend on the threads, and these are added in order.
"""

from __future__ import annotations

import math

import numpy as np

from driftwell.images.gap_far import LEVEL, MODES, SIDE, SPACINGS, TAPS
from driftwell.images.gap_frame import height, lateral
from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import fused, lanes, load, load_one, store, total

GROUPS = 8
"""Groups of charges that are spread apart."""
GRID = SIDE * SIDE * MODES
"""Numbers of one grid."""
SCRATCH = 16
GRID_WORK = GROUPS * SCRATCH + (GROUPS + 1) * GRID
"""float64 of work space: room for each group, their grids (the first holds the sum), potentials."""
BLOCK = 512
"""Charges that are handed their fields at a time."""
Box = tuple[int, int, int, int, int]
"""Number of the spacing, first node along both axes, and numbers of nodes."""


@outer_kernel
def box_of(position: np.ndarray, charge: np.ndarray, frame: np.ndarray) -> Box:
    """The grid that holds all charges, and its nodes that they reach.

    frame : of gap_frame.py. Places of charges that are 0 count as far as they fit.
    """
    low_x = low_y = math.inf
    high_x = high_y = -math.inf
    for i in range(charge.size):
        if charge[i] != 0.0:
            x, y = lateral(position, frame, i)
            low_x, high_x = min(low_x, x), max(high_x, x)
            low_y, high_y = min(low_y, y), max(high_y, y)
    if not low_x <= high_x or not low_y <= high_y:
        low_x = high_x = low_y = high_y = 0.0
    level, most = 0, SIDE - TAPS
    while level + 1 < len(SPACINGS) and (
        max(high_x - low_x, high_y - low_y) > (most - 1) * SPACINGS[level]
    ):
        level += 1
    h = SPACINGS[level]
    room_x = max(0.0, (most - 1) * h - (high_x - low_x))
    room_y = max(0.0, (most - 1) * h - (high_y - low_y))
    least_x, least_y, most_x, most_y = low_x, low_y, high_x, high_y
    for i in range(charge.size):
        if charge[i] == 0.0:
            x, y = lateral(position, frame, i)
            if x >= low_x - 0.5 * room_x and x <= high_x + 0.5 * room_x:
                least_x, most_x = min(least_x, x), max(most_x, x)
            if y >= low_y - 0.5 * room_y and y <= high_y + 0.5 * room_y:
                least_y, most_y = min(least_y, y), max(most_y, y)
    first_x, first_y = math.floor(least_x / h) - 2, math.floor(least_y / h) - 2
    nodes_x = min(SIDE, math.floor(most_x / h) + 4 - first_x)
    nodes_y = min(SIDE, math.floor(most_y / h) + 4 - first_y)
    return level, first_x, first_y, nodes_x, nodes_y


@inner_kernel
def _weights(t: float) -> tuple[float, float, float, float, float, float]:
    """The quintic B-splines at a place, t beyond the third of their six nodes."""
    s = 1.0 / 120.0
    t2 = t * t
    t3 = t2 * t
    t4 = t2 * t2
    t5 = t4 * t
    r = 1.0 - t
    r2 = r * r
    return (
        s * r2 * r2 * r,
        s * (26.0 - 50.0 * t + 20.0 * t2 + 20.0 * t3 - 20.0 * t4 + 5.0 * t5),
        s * (66.0 - 60.0 * t2 + 30.0 * t4 - 10.0 * t5),
        s * (26.0 + 50.0 * t + 20.0 * t2 - 20.0 * t3 - 20.0 * t4 + 10.0 * t5),
        s * (1.0 + 5.0 * t + 10.0 * t2 + 10.0 * t3 + 5.0 * t4 - 5.0 * t5),
        s * t5,
    )


@inner_kernel
def _rates(t: float) -> tuple[float, float, float, float, float, float]:
    """Their rates with t."""
    s = 1.0 / 24.0
    t2 = t * t
    t3 = t2 * t
    t4 = t2 * t2
    r = 1.0 - t
    r2 = r * r
    return (
        -s * r2 * r2,
        s * (-10.0 + 8.0 * t + 12.0 * t2 - 16.0 * t3 + 5.0 * t4),
        s * (-24.0 * t + 24.0 * t3 - 10.0 * t4),
        s * (10.0 + 8.0 * t - 12.0 * t2 - 16.0 * t3 + 10.0 * t4),
        s * (1.0 + 4.0 * t + 6.0 * t2 + 4.0 * t3 - 5.0 * t4),
        s * t4,
    )


@inner_kernel
def _cell(x: float, h: float, first: int, nodes: int) -> tuple[int, float, bool]:
    """The first node that a place reaches, how far it is beyond the third, and whether within."""
    place = x / h - first - 2.0
    within = place >= 0.0 and place <= nodes - 5.0
    place = min(max(place, 0.0), nodes - 5.0)
    cell = min(int(place), nodes - TAPS)
    return cell, place - cell, within


@inner_kernel
def _polynomials(u: float, work: np.ndarray, at: int) -> bool:
    """T_0 to T_7 of a height into `work`, and their rates with it behind; whether it is between.

    T_m' = 2 m U_(m-1) with the height, for x = 2 u - 1.
    """
    between = u >= 0.0 and u <= 1.0
    x = 2.0 * min(max(u, 0.0), 1.0) - 1.0
    work[at], work[at + 1] = 1.0, x
    work[at + MODES], work[at + MODES + 1] = 0.0, 2.0
    below, here = 1.0, 2.0 * x
    for m in range(2, MODES):
        work[at + m] = 2.0 * x * work[at + m - 1] - work[at + m - 2]
        work[at + MODES + m] = 2.0 * m * here
        below, here = here, 2.0 * x * here - below
    return between


@outer_kernel
def spread(
    group: int,
    position: np.ndarray,
    charge: np.ndarray,
    frame: np.ndarray,
    box: Box,
    work: np.ndarray,
) -> None:
    """Spread one group of the charges over its grid; work : (GRID_WORK,)."""
    level, first_x, first_y, nodes_x, nodes_y = box
    h = SPACINGS[level]
    n = charge.size
    scratch = group * SCRATCH
    grid = GROUPS * SCRATCH + group * GRID
    for k in range(grid, grid + nodes_x * nodes_y * MODES):
        work[k] = 0.0
    for i in range(group * n // GROUPS, (group + 1) * n // GROUPS):
        q = charge[i]
        if q == 0.0:
            continue
        x, y = lateral(position, frame, i)
        a, t_x, _ = _cell(x, h, first_x, nodes_x)
        b, t_y, _ = _cell(y, h, first_y, nodes_y)
        _polynomials(height(position, frame, i), work, scratch)
        shape = load(work, scratch)
        w_x, w_y = _weights(t_x), _weights(t_y)
        for k in range(TAPS):
            row = grid + ((a + k) * nodes_y + b) * MODES
            part = shape * lanes(q * w_x[k])
            for m in range(TAPS):
                at = row + MODES * m
                store(work, at, fused(part, lanes(w_y[m]), load(work, at)))


@outer_kernel
def merge(row: int, box: Box, work: np.ndarray) -> None:
    """Add one row of all groups' grids into that of the first, in order."""
    first, length = GROUPS * SCRATCH, box[4] * MODES
    for k in range(row * length, (row + 1) * length):
        amount = work[first + k]
        for group in range(1, GROUPS):
            amount += work[first + group * GRID + k]
        work[first + k] = amount


@outer_kernel
def sum_row(row: int, box: Box, table: np.ndarray, first: int, work: np.ndarray) -> None:
    """Potentials of one row of nodes, from all; table : C from `first` on."""
    level, _, _, nodes_x, nodes_y = box
    grid = GROUPS * SCRATCH
    out = grid + GROUPS * GRID + row * nodes_y * MODES
    kernel_start = first + level * LEVEL
    for node in range(nodes_y):
        one = two = lanes(0.0)
        for a in range(nodes_x):
            line = kernel_start + abs(a - row) * SIDE * MODES * MODES
            for b in range(nodes_y):
                at = grid + (a * nodes_y + b) * MODES
                c = line + abs(b - node) * MODES * MODES
                for m in range(0, MODES, 2):
                    one = fused(load_one(work, at + m), load(table, c + MODES * m), one)
                    two = fused(load_one(work, at + m + 1), load(table, c + MODES * (m + 1)), two)
        store(work, out + MODES * node, one + two)


@outer_kernel
def hand_out(
    block: int,
    position: np.ndarray,
    constant: float,
    frame: np.ndarray,
    box: Box,
    work: np.ndarray,
    out_image: np.ndarray,
) -> None:
    """Add field and potential to those of one block of charges."""
    level, first_x, first_y, nodes_x, nodes_y = box
    h = SPACINGS[level]
    d = frame[6]
    to_volt = constant / d
    to_field = -to_volt / d
    grid = GROUPS * SCRATCH + GROUPS * GRID
    scratch = GRID_WORK + block * SCRATCH
    for i in range(block * BLOCK, min((block + 1) * BLOCK, position.shape[1])):
        x, y = lateral(position, frame, i)
        a, t_x, in_x = _cell(x, h, first_x, nodes_x)
        b, t_y, in_y = _cell(y, h, first_y, nodes_y)
        between = _polynomials(height(position, frame, i), work, scratch)
        w_x, w_y, r_x, r_y = _weights(t_x), _weights(t_y), _rates(t_x), _rates(t_y)
        level_u = slope_x = slope_y = lanes(0.0)
        for k in range(TAPS):
            row = grid + ((a + k) * nodes_y + b) * MODES
            along = slope = lanes(0.0)
            for m in range(TAPS):
                here = load(work, row + MODES * m)
                along = fused(here, lanes(w_y[m]), along)
                slope = fused(here, lanes(r_y[m]), slope)
            level_u = fused(along, lanes(w_x[k]), level_u)
            slope_x = fused(along, lanes(r_x[k]), slope_x)
            slope_y = fused(slope, lanes(w_x[k]), slope_y)
        shape = load(work, scratch)
        gx = total(slope_x * shape) / h if in_x else 0.0
        gy = total(slope_y * shape) / h if in_y else 0.0
        gu = total(level_u * load(work, scratch + MODES)) if between else 0.0
        out_image[3, i] += to_volt * total(level_u * shape)
        for axis in range(3):
            out_image[axis, i] += to_field * (
                gx * frame[8 + axis] + gy * frame[11 + axis] + gu * frame[3 + axis]
            )
