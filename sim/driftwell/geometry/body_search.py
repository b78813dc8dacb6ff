"""The nearest body, asked for by the address of the code: callers are compiled without it.

The code for all bodies is long, and the time loop would carry it several times over; a run without
electrodes would wait for its compilation as well. So the table of bodies holds its address.
"""

from __future__ import annotations

from typing import Any

import numba
import numpy as np
from numba import types

from driftwell.geometry.body_table import BodyTable
from driftwell.geometry.distance import nearest_body, to_body
from driftwell.kernels import pointed_kernel
from driftwell.kernels.lane_values import emitted_code
from driftwell.kernels.pointers import CompiledFunction, call_address

ALL = -1
"""Instead of one body's row: whichever is nearest."""
_TUPLE: Any = types.Tuple
_FOUND = _TUPLE((types.float64, types.int64, types.float64))


@pointed_kernel
def search_bodies(
    table: BodyTable, body: int, x: float, y: float, z: float
) -> tuple[float, int, float]:
    """Signed distance, m, row and side of one body, or of ALL the nearest one."""
    if body < 0:
        return nearest_body(table, x, y, z)
    distance, side = to_body(table, body, x, y, z)
    return distance, body, side


def searched(table: BodyTable) -> BodyTable:
    """The table with the address of the code that searches it, for this process alone."""
    if not len(table.whole):
        return table
    numbers = [types.int64, *[types.float64] * 3]
    typeof: Any = numba.typeof
    compiled = CompiledFunction(search_bodies, _FOUND(typeof(table), *numbers))
    return table._replace(search=np.array([compiled.__wrapper_address__()], dtype=np.int64))


@emitted_code
def look(typing: Any, table: Any, body: Any, x: Any, y: Any, z: Any) -> Any:
    """Call :func:`search_bodies` by the address in the table."""
    number = types.float64
    signature = _FOUND(table, types.int64, number, number, number)
    place = BodyTable._fields.index("search")

    def emitted(context: Any, builder: Any, sig: Any, args: Any) -> Any:
        held = builder.extract_value(args[0], place)
        address = builder.load(context.make_array(table.types[place])(context, builder, held).data)
        return call_address(context, builder, sig, address, args)

    return signature, emitted
