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
from driftwell.kernels.lanes import fused, lanes, put_some, some
from driftwell.stepping.accounts import Six
from driftwell.stepping.forces import at_rest
from driftwell.stepping.motion import Charges
from driftwell.stepping.six_lanes import SixLanes, no_six, six_and, six_totals, with_moment


@inner_kernel
def are_plain(table: FieldTable) -> bool:
    """Whether all electric fields are uniform ones or quadrupoles, and constant in time."""
    for f in range(table.kind.size):
        if table.kind[f] not in (UNIFORM_ELECTRIC, STATIC_QUADRUPOLE):
            return False
    return at_rest(table)


@outer_kernel
def take_plain_fields(
    table: FieldTable, charges: Charges, first: int, last: int, out_field: np.ndarray
) -> Six:
    """E of plain fields at charges; overwrites their part of `out_field` (3, n), V/m.

    Returns the fields' force and torque on them, N and N m.
    """
    given = no_six()
    whole = first + (last - first) // 8 * 8
    for i in range(first, whole, 8):
        given = six_and(given, _eight(table, charges, i, 8, out_field))
    if whole < last:
        given = six_and(given, _eight(table, charges, whole, last - whole, out_field))
    return six_totals(given)


@inner_kernel
def _eight(
    table: FieldTable, charges: Charges, i: int, count: int, out_field: np.ndarray
) -> SixLanes:
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
    q = some(charges.charge, i, count)
    return with_moment(x, y, z, q * ex, q * ey, q * ez)
