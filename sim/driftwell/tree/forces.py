"""What the walk finds is summed: far cells in lanes, near charges in lanes, and a leaf's own."""

from __future__ import annotations

import numpy as np

from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import (
    ROUGH_SCALE,
    WIDTH,
    LanesType,
    fused,
    inverse_cube,
    inverse_root,
    lanes,
    load,
    load_one,
    scaled_rough_inverse_cube,
    store,
    where_above,
)
from driftwell.tree.cells import BATCH, CELL, RIGHT, TURNED, Away, Tree, X, Y, Z
from driftwell.tree.expansions import (
    BasisType,
    add_cells,
    add_far_charges,
    field_of,
    field_of_cell,
    is_mixed,
    moment_row,
    side_by_side,
)

NEXT_TO_NOTHING = 1e-180
"""Added to all squared distances, of up to 1, so that charges at one place push nowhere."""
AT_ONE_PLACE = 10.0 * NEXT_TO_NOTHING
"""Squared distances below this are those of charges at one place, in the tree's units."""


@inner_kernel
def local_lanes(of: BasisType) -> int:
    """Where, among a desk's lanes, a local expansion is added up."""
    return int(TURNED + BATCH * moment_row(of))


@outer_kernel
def hear(
    of: BasisType,
    cell: int,
    far: int,
    which: np.ndarray,
    away: Away,
    tree: Tree,
    softening2: float,
    work_lanes: np.ndarray,
) -> None:
    """Add so many far cells' images to a cell's local expansion, in lanes, eight at a time.

    which : (far + 8,) int64, overwritten behind the first `far`
    """
    row = tree.cells[cell]
    length = moment_row(of)
    turned, local = work_lanes[TURNED:], work_lanes[local_lanes(of) :]
    for k in range(far, far + BATCH):
        which[k] = tree.cells.shape[0] - 1  # a cell without charge
    for k in range(0, far, BATCH):
        side_by_side(tree.cells.reshape(-1), BATCH, CELL, which, k, work_lanes)
        side_by_side(tree.moments, length, length, which, k, turned)
        x = (lanes(row[X]) - load(work_lanes, 0)) - lanes(away[0])
        y = (lanes(row[Y]) - load(work_lanes, BATCH)) - lanes(away[1])
        z = (lanes(row[Z]) - load(work_lanes, 2 * BATCH)) - lanes(away[2])
        add_cells(of, x, y, z, _inverse(x, y, z, softening2), turned, local)


@outer_kernel
def one_by_one(
    of: BasisType,
    cell: int,
    other: int,
    away: Away,
    tree: Tree,
    softening2: float,
    work_lanes: np.ndarray,
) -> None:
    """Let a cell gather from another where one is a leaf whose charges are taken one by one."""
    is_leaf = tree.cells[cell, RIGHT] == 0.0
    leaf, middle = (cell, tree.cells[other]) if is_leaf else (other, tree.cells[cell])
    sign = 1.0 if is_leaf else -1.0
    local = work_lanes[local_lanes(of) :]
    none = lanes(0.0)
    for i in range(tree.first[leaf], tree.first[leaf + 1], WIDTH):
        x = (load(tree.place[0], i) - lanes(middle[X])) - lanes(sign * away[0])
        y = (load(tree.place[1], i) - lanes(middle[Y])) - lanes(sign * away[1])
        z = (load(tree.place[2], i) - lanes(middle[Z])) - lanes(sign * away[2])
        inverse = _inverse(x, y, z, softening2)
        if is_leaf:
            found = field_of_cell(of, x, y, z, inverse, tree.moments, other * moment_row(of))
            _add_all(tree.field, i, found)
        else:
            charge = load(tree.place[3], i)
            add_far_charges(of, none - x, none - y, none - z, inverse, charge, local)


@outer_kernel
def push(
    of: BasisType,
    cell: int,
    near: int,
    ranges: np.ndarray,
    away: Away,
    tree: Tree,
    softening2: float,
) -> None:
    """Add images of near charges, in so many ranges, to the fields at a leaf's own, by pairs."""
    x, y, z, charge = tree.place[0], tree.place[1], tree.place[2], tree.place[3]
    soft = lanes(softening2)
    for i in range(tree.first[cell], tree.first[cell + 1], 2 * WIDTH):
        xa, ya, za = _moved(x, y, z, i, away)
        xb, yb, zb = _moved(x, y, z, i + WIDTH, away)
        ax = ay = az = bx = by = bz = lanes(0.0)
        for k in range(near):
            for j in range(ranges[2 * k], ranges[2 * k + 1]):
                xj, yj = load_one(x, j), load_one(y, j)
                zj, qj = load_one(z, j), load_one(charge, j)
                dx, dy, dz = xa - xj, ya - yj, za - zj
                square = fused(dx, dx, fused(dy, dy, fused(dz, dz, soft)))
                s = qj * _cube(of, square)
                ax, ay, az = fused(s, dx, ax), fused(s, dy, ay), fused(s, dz, az)
                dx, dy, dz = xb - xj, yb - yj, zb - zj
                square = fused(dx, dx, fused(dy, dy, fused(dz, dz, soft)))
                s = qj * _cube(of, square)
                bx, by, bz = fused(s, dx, bx), fused(s, dy, by), fused(s, dz, bz)
        unit = lanes(ROUGH_SCALE) if is_mixed(of) else lanes(1.0)
        _add(tree.field[0], i, unit * ax)
        _add(tree.field[1], i, unit * ay)
        _add(tree.field[2], i, unit * az)
        _add(tree.field[0], i + WIDTH, unit * bx)
        _add(tree.field[1], i + WIDTH, unit * by)
        _add(tree.field[2], i + WIDTH, unit * bz)


@outer_kernel
def push_potential(
    cell: int, near: int, ranges: np.ndarray, away: Away, tree: Tree, softening2: float
) -> None:
    """Add the potentials of near charges to those at a leaf's own; a softened one's own too."""
    x, y, z, charge = tree.place[0], tree.place[1], tree.place[2], tree.place[3]
    soft, nothing = lanes(softening2), lanes(AT_ONE_PLACE)
    for i in range(tree.first[cell], tree.first[cell + 1], WIDTH):
        xi, yi, zi = _moved(x, y, z, i, away)
        potential = lanes(0.0)
        for k in range(near):
            for j in range(ranges[2 * k], ranges[2 * k + 1]):
                dx, dy, dz = xi - load_one(x, j), yi - load_one(y, j), zi - load_one(z, j)
                square = fused(dx, dx, fused(dy, dy, fused(dz, dz, soft)))
                qj = where_above(square, nothing, load_one(charge, j))
                potential = fused(qj, inverse_root(square), potential)
        _add(tree.field[3], i, potential)


@inner_kernel
def _moved(
    x: np.ndarray, y: np.ndarray, z: np.ndarray, i: int, away: Away
) -> tuple[LanesType, LanesType, LanesType]:
    """Eight places as they stand to images that are `away`."""
    return (
        load(x, i) - lanes(away[0]),
        load(y, i) - lanes(away[1]),
        load(z, i) - lanes(away[2]),
    )


@inner_kernel
def settle(of: BasisType, cell: int, tree: Tree, local: np.ndarray, own: int) -> None:
    """Add the far field to the fields at a leaf's charges."""
    row = tree.cells[cell]
    for i in range(tree.first[cell], tree.first[cell + 1], WIDTH):
        x = load(tree.place[0], i) - lanes(row[X])
        y = load(tree.place[1], i) - lanes(row[Y])
        z = load(tree.place[2], i) - lanes(row[Z])
        found = field_of(of, x, y, z, local, own)
        _add_all(tree.field, i, found)


@inner_kernel
def _inverse(x: LanesType, y: LanesType, z: LanesType, softening2: float) -> LanesType:
    """1 over softened distances."""
    return inverse_root(fused(x, x, fused(y, y, fused(z, z, lanes(softening2)))))


@inner_kernel
def _cube(of: BasisType, square: LanesType) -> LanesType:
    if is_mixed(of):
        return scaled_rough_inverse_cube(square)
    return inverse_cube(square)


@inner_kernel
def _add_all(field: np.ndarray, i: int, found: tuple[LanesType, ...]) -> None:
    """Add field and potential to those of eight charges."""
    _add(field[0], i, found[0])
    _add(field[1], i, found[1])
    _add(field[2], i, found[2])
    _add(field[3], i, found[3])


@inner_kernel
def _add(row: np.ndarray, i: int, value: LanesType) -> None:
    store(row, i, load(row, i) + value)
