"""Fields that are plain: uniform electric ones and quadrupoles, none of which changes in time.

Where a scenario has no other electric fields, all of them are taken in one go through the charges,
in lanes, with the force and torque that the accounts ask for. What gives no power asks for no sum
of charge times potential either.

E is that of the kernels in fields/ to the last bit: each adds

    w n                                     (uniform electric)                              (1)
    -w p3 (-p4 (x - x0), -p5 (y - y0), z - z0)      (static quadrupole)                     (2)

to what the fields before it gave, in the order of their table.
"""

from __future__ import annotations

import numpy as np

from driftwell.fields.static_quadrupole import STATIC_QUADRUPOLE
from driftwell.fields.table import FieldTable
from driftwell.fields.uniform_electric import UNIFORM_ELECTRIC
from driftwell.kernels import inner_kernel, outer_kernel
from driftwell.kernels.lanes import LanesType, fused, lanes, put_some, some, total
from driftwell.kernels.waveform import CONSTANT
from driftwell.stepping.accounts import Six
from driftwell.stepping.motion import Charges


@inner_kernel
def are_plain(table: FieldTable) -> bool:
    """Whether all electric fields are uniform ones or quadrupoles, and constant in time."""
    for f in range(table.kind.size):
        kind = table.kind[f]
        if kind not in (UNIFORM_ELECTRIC, STATIC_QUADRUPOLE) or table.wave_kind[f] != CONSTANT:
            return False
    return True


@outer_kernel
def take_plain_fields(
    table: FieldTable, charges: Charges, first: int, last: int, out_field: np.ndarray
) -> Six:
    """E of plain fields at charges; overwrites their part of `out_field` (3, n), V/m.

    Returns the fields' force and torque on them, N and N m.
    """
    px = py = pz = lanes(0.0)
    lx = ly = lz = lanes(0.0)
    whole = first + (last - first) // 8 * 8
    for i in range(first, whole, 8):
        fx, fy, fz, tx, ty, tz = _eight(table, charges, i, 8, out_field)
        px, py, pz = px + fx, py + fy, pz + fz
        lx, ly, lz = lx + tx, ly + ty, lz + tz
    if whole < last:
        fx, fy, fz, tx, ty, tz = _eight(table, charges, whole, last - whole, out_field)
        px, py, pz = px + fx, py + fy, pz + fz
        lx, ly, lz = lx + tx, ly + ty, lz + tz
    return total(px), total(py), total(pz), total(lx), total(ly), total(lz)


@inner_kernel
def _eight(
    table: FieldTable, charges: Charges, i: int, count: int, out_field: np.ndarray
) -> tuple[LanesType, LanesType, LanesType, LanesType, LanesType, LanesType]:
    """Eight charges, or the `count` last; force and torque on each."""
    x = some(charges.position[0], i, count)
    y = some(charges.position[1], i, count)
    z = some(charges.position[2], i, count)
    ex, ey, ez = lanes(0.0), lanes(0.0), lanes(0.0)
    for f in range(table.kind.size):
        w, p = table.wave_parameter[f, 0], table.parameter[f]
        if table.kind[f] == UNIFORM_ELECTRIC:
            ex, ey, ez = ex + lanes(w * p[3]), ey + lanes(w * p[4]), ez + lanes(w * p[5])
        else:
            slope = w * p[3]
            ex = fused(lanes(slope * p[4]), x - lanes(p[0]), ex)
            ey = fused(lanes(slope * p[5]), y - lanes(p[1]), ey)
            ez = fused(lanes(-slope), z - lanes(p[2]), ez)
    put_some(out_field[0], i, count, ex)
    put_some(out_field[1], i, count, ey)
    put_some(out_field[2], i, count, ez)
    q, minus = some(charges.charge, i, count), lanes(-0.0)
    fx, fy, fz = q * ex, q * ey, q * ez
    return (
        fx,
        fy,
        fz,
        fused(y, fz, minus - z * fy),
        fused(z, fx, minus - x * fz),
        fused(x, fy, minus - y * fx),
    )
